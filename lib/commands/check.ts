/** `npm run check`: the quick loop, without a database: format and lint, types, unit tests, imports. */
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { runToEnd } from "@/lib/commands/run-tool";

export interface QuickStep {
  title: string;
  args: string[];
}

/** Format, lint and types; the unit tests come after them, by {@link check} here and by the test command with counts. */
export const STATIC_STEPS: readonly QuickStep[] = [
  { title: "format and lint", args: [PROGRAMS.biome, "ci", "--error-on-warnings", "."] },
  { title: "types", args: [PROGRAMS.tsc, "--noEmit", "-p", "."] },
];

export default async function check(_args: string[], signal: AbortSignal): Promise<number> {
  const unit = { title: "unit tests and imports", args: [PROGRAMS.vitest, "run", "--project", "unit"] };
  const failed: string[] = [];
  for (const step of [...STATIC_STEPS, unit]) if (!(await passes(step, signal))) failed.push(step.title);
  console.log(failed.length === 0 ? "All checks passed." : `Failed: ${failed.join(", ")}`);
  return failed.length === 0 ? 0 : 1;
}

/** Runs a step with its output on the terminal. */
export async function passes(step: QuickStep, signal: AbortSignal): Promise<boolean> {
  console.log(`— ${step.title}`);
  const result = await runToEnd(process.execPath, step.args, { cwd: CHECKOUT, signal, show: true });
  return result.code === 0;
}
