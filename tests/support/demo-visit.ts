/** A real `npm start` with its demo, and people who are signed in to it, each in a browser of their own. */
import { afterAll } from "vitest";
import { makeHome, openStart, type RunningStart } from "@/tests/support/running-start";
import { openVisitor, signIn, type Visitor } from "@/tests/support/visitor";

/** Of every person of the demo (contract, section 1). */
export const DEMO_PASSWORD = "trim-demo-2026";

const starts: RunningStart[] = [];
afterAll(async () => {
  for (const start of starts.splice(0)) {
    start.interrupt();
    await start.ended();
  }
});

export interface DemoVisit<Name extends string> {
  origin: string;
  visitors: Record<Name, Visitor>;
}

/** Starts the demo for one test file, which ends it, and signs people in. @param names in front of `@marram.example` */
export async function visitDemo<Name extends string>(names: readonly Name[]): Promise<DemoVisit<Name>> {
  const start = await openStart({ home: makeHome(), env: { TRIMWRIGHT_DEMO: "1" } });
  starts.push(start);
  const origin = `http://127.0.0.1:${start.port}`;
  const visitors = {} as Record<Name, Visitor>;
  for (const name of names) {
    visitors[name] = await openVisitor(origin);
    await signIn(visitors[name], `${name}@marram.example`, DEMO_PASSWORD);
  }
  return { origin, visitors };
}
