/** Runs one command: signals become an AbortSignal, errors one line, the outcome an exit code. */
import { isRunByNpm } from "@/lib/env";
import { AppError } from "@/lib/errors";

/**
 * A command. @param signal aborts at Ctrl-C or SIGTERM; the command then stops what it started and returns.
 * @returns the exit code.
 */
export type Command = (args: string[], signal: AbortSignal) => Promise<number>;

const STOP_SIGNALS = ["SIGINT", "SIGTERM", "SIGHUP"] as const;
const STOPPED_EXIT_CODE = 130;
/** Time for handles left open, before the process ends all the same. */
const LINGER_MS = 3_000;
const IMPATIENT_AFTER_MS = 1_000;
const PARENT_LOOK_MS = 500;

/** Loads the command's file, which exports a {@link Command} as default, and runs it to its end. */
export async function runCommand(name: string, args: string[]): Promise<void> {
  await runToExitCode(async (signal) => {
    const module = (await import(/* @vite-ignore */ `./${name}.ts`)) as { default: Command };
    return await module.default(args, signal);
  });
}

/** Runs the work under the process's stop signals and leaves its outcome as the process's exit code. */
export async function runToExitCode(work: (signal: AbortSignal) => Promise<number>): Promise<void> {
  const stop = new AbortController();
  listenForStop(stop);
  try {
    process.exitCode = await work(stop.signal);
  } catch (error) {
    process.exitCode = stop.signal.aborted ? STOPPED_EXIT_CODE : 1;
    if (!stop.signal.aborted) console.error(`trimwright: ${plainMessage(error)}`);
  }
  setTimeout(() => process.exit(), LINGER_MS).unref();
}

/**
 * Aborts at the first signal and ends the process at a later one. Ctrl-C can arrive twice, from the terminal and passed on
 * by npm. Npm's shell passes no SIGTERM on and just ends: under npm, losing the parent therefore means the same.
 */
function listenForStop(stop: AbortController): void {
  let firstAt = 0;
  for (const signal of STOP_SIGNALS) {
    process.on(signal, () => {
      if (firstAt > 0 && Date.now() - firstAt > IMPATIENT_AFTER_MS) process.exit(STOPPED_EXIT_CODE);
      firstAt ||= Date.now();
      stop.abort();
    });
  }
  if (!isRunByNpm()) return;
  const parent = process.ppid;
  const watch = setInterval(() => {
    if (process.ppid === parent) return;
    clearInterval(watch);
    stop.abort();
  }, PARENT_LOOK_MS);
  watch.unref();
}

/** Errors of the system and of PostgreSQL by their code, in words that say what to do. */
const MESSAGE_BY_CODE: Record<string, (error: NodeJS.ErrnoException) => string> = {
  ENOSPC: () => "Disk full: free some space and start again",
  EDQUOT: () => "Disk full: this user's quota is used up",
  EACCES: (error) => `No permission for ${error.path ?? "a file"}`,
  EROFS: (error) => `The file system is read-only: ${error.path ?? ""}`,
  ECONNREFUSED: () => "The database does not answer: connection refused",
  ENOTFOUND: () => "The database does not answer: its host is unknown",
  ETIMEDOUT: () => "The database does not answer in time",
  "28P01": () => "The database refused the password",
  "28000": () => "The database refused the role",
  "3D000": (error) => `The database is not there: ${error.message}`,
  "42501": (error) => `The database role may not do this: ${error.message}`,
  "53100": () => "Disk full: the database cannot write",
};

/** One line for whatever went wrong; an error of our own making keeps its place in the code, for a report. */
export function plainMessage(error: unknown): string {
  if (!(error instanceof Error)) return String(error);
  if (/no space left|disk full/i.test(error.message)) return MESSAGE_BY_CODE.ENOSPC?.(error) ?? error.message;
  const code = String((error as NodeJS.ErrnoException).code);
  const known = MESSAGE_BY_CODE[code];
  if (known !== undefined) return known(error);
  if (error instanceof AppError) return error.message.replaceAll("\n", " ");
  return error.stack ?? error.message;
}
