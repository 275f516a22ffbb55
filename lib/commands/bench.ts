/**
 * `npm run bench [-- name …]`: measures what claims of speed rest on, every bench of `tests/bench` or those named, and closes
 * with goal and measured value line by line. A goal that is not met is no failure: machines differ, and so does their load.
 */
import { readdirSync } from "node:fs";
import { cpus } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { runToEnd } from "@/lib/commands/run-tool";
import { childEnv, hasMemorySettings, largePagesEnv } from "@/lib/env";
import { AppError } from "@/lib/errors";

export interface Outcome {
  what: string;
  value: number;
  /** Written after the value, as "CPU s" or "× csv-parse alone". */
  unit: string;
  /** The most the value should be; left out where none is set. */
  goal?: number;
}

export interface BenchTools {
  /** Prints a line of the bench's own. */
  say: (line: string) => void;
  signal: AbortSignal;
}

/** One bench: the default export of a file `tests/bench/<name>.bench.ts`. It cleans up after itself, also when it is stopped. */
export interface Bench {
  title: string;
  run(tools: BenchTools): Promise<Outcome[]>;
}

const FOLDER = join(CHECKOUT, "tests/bench");
const ENDING = ".bench.ts";

export default async function bench(args: string[], signal: AbortSignal): Promise<number> {
  const known = readdirSync(FOLDER)
    .filter((name) => name.endsWith(ENDING))
    .map((name) => name.slice(0, -ENDING.length))
    .sort();
  const unknown = args.filter((name) => !known.includes(name));
  if (unknown.length > 0) {
    const message = `No bench ${unknown.join(", ")}; there are ${known.join(", ")}`;
    throw new AppError("command.usage", { message });
  }
  if (!hasMemorySettings()) {
    // Benches are to have their memory as the app and the worker do.
    const options = { cwd: CHECKOUT, env: childEnv(largePagesEnv()), show: true, signal };
    return (await runToEnd(process.execPath, [PROGRAMS.bootstrap, "bench", ...args], options)).code;
  }
  const say = (line: string) => console.log(line);
  say(`Node ${process.version.slice(1)}, ${cpus().length} cores (${cpus()[0]?.model.trim() ?? "unknown"})`);
  const outcomes: Outcome[] = [];
  for (const name of args.length > 0 ? args : known) {
    if (signal.aborted) break;
    const { default: one } = (await import(pathToFileURL(join(FOLDER, `${name}${ENDING}`)).href)) as { default: Bench };
    say(`\n— ${name}: ${one.title}`);
    outcomes.push(...(await one.run({ say, signal })));
  }
  say("");
  for (const outcome of outcomes) say(closingLine(outcome));
  return signal.aborted ? 130 : 0;
}

/** A measured value against its goal. */
export function closingLine({ what, value, unit, goal }: Outcome): string {
  const shown = `${what}: ${value.toPrecision(3)} ${unit}`;
  if (goal === undefined) return shown;
  return `${shown} (goal: at most ${goal}) ${value <= goal ? "met" : "NOT MET"}`;
}
