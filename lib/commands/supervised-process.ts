/** A child process that is kept running: started again when it ends by itself, ended in order when asked. */
import { type ChildProcess, spawn } from "node:child_process";
import { closeSync, mkdirSync, openSync, readFileSync, renameSync, rmSync, statSync } from "node:fs";
import { dirname, join } from "node:path";
import { setTimeout as delay } from "node:timers/promises";
import { CHECKOUT } from "@/lib/commands/checkout";

const STABLE_AFTER_MS = 60_000;
const LONGEST_PAUSE_MS = 30_000;
const KILL_AFTER_MS = 15_000;
const LOG_ROTATED_AT_BYTES = 10_000_000;
const LEAVE_WITH_PARENT = join(CHECKOUT, "lib/commands/leave-with-parent.mjs");

export interface SupervisedOptions {
  /** For messages: "web", "worker". */
  name: string;
  /** Arguments of Node: a script and its own arguments. */
  args: string[];
  env: NodeJS.ProcessEnv;
  logFile: string;
  say: (line: string) => void;
}

export interface SupervisedProcess {
  /** How often it ended without being asked to. */
  crashes(): number;
  pid(): number | undefined;
  /** The last line it wrote. */
  lastLine(): string;
  /** Ends it and returns when it is gone. */
  stop(): Promise<void>;
}

/** Starts the process and keeps it running until `stop`. Pauses grow from 1 s to 30 s while it keeps ending early. */
export function supervise(options: SupervisedOptions): SupervisedProcess {
  const stopping = new AbortController();
  let child: ChildProcess | undefined;
  let crashes = 0;

  const loop = (async () => {
    let early = 0;
    while (!stopping.signal.aborted) {
      const startedAt = Date.now();
      child = launch(options);
      const how = await ended(child);
      if (stopping.signal.aborted) return;
      crashes += 1;
      early = Date.now() - startedAt > STABLE_AFTER_MS ? 0 : early + 1;
      const pauseMs = Math.min(1000 * 2 ** Math.max(0, early - 1), LONGEST_PAUSE_MS);
      options.say(`The ${options.name} process ended (${how}); starting it again. Its log: ${options.logFile}`);
      await delay(pauseMs, undefined, { signal: stopping.signal }).catch(ignoreAbort);
    }
  })();

  return {
    crashes: () => crashes,
    pid: () => child?.pid,
    lastLine: () => readFileSync(options.logFile, "utf8").trimEnd().split("\n").at(-1) ?? "",
    stop: async () => {
      stopping.abort();
      child?.kill("SIGTERM");
      const kill = setTimeout(() => child?.kill("SIGKILL"), KILL_AFTER_MS);
      await loop;
      clearTimeout(kill);
    },
  };
}

/** In a session of its own: Ctrl-C in the terminal reaches the supervisor only, which ends things in order. */
function launch(options: SupervisedOptions): ChildProcess {
  mkdirSync(dirname(options.logFile), { recursive: true });
  rotate(options.logFile);
  const log = openSync(options.logFile, "a");
  const child = spawn(process.execPath, ["--import", LEAVE_WITH_PARENT, ...options.args], {
    cwd: CHECKOUT,
    env: options.env,
    detached: true,
    stdio: ["ignore", log, log, "ipc"],
  });
  closeSync(log);
  return child;
}

function ended(child: ChildProcess): Promise<string> {
  return new Promise((resolve) => {
    child.once("error", (error) => resolve(error.message));
    child.once("exit", (code, signal) => resolve(signal ?? `code ${code}`));
  });
}

function rotate(logFile: string): void {
  const size = statSync(logFile, { throwIfNoEntry: false })?.size ?? 0;
  if (size < LOG_ROTATED_AT_BYTES) return;
  rmSync(`${logFile}.1`, { force: true });
  renameSync(logFile, `${logFile}.1`);
}

function ignoreAbort(error: Error): void {
  if (error.name !== "AbortError") throw error;
}
