/** A real `npm start` in a home of its own, seen from outside: what it prints, which processes it has, how it ends. */
import { type ChildProcess, spawn } from "node:child_process";
import { once } from "node:events";
import {
  chmodSync,
  existsSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  readlinkSync,
  rmSync,
  symlinkSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { setTimeout as delay } from "node:timers/promises";
import { afterAll } from "vitest";
import { findFreePort } from "@/db/free-port";
import { findRunningServer } from "@/db/pid-file";
import { privatePackagesFolder } from "@/db/postgres-binaries";
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { TEST_HOME } from "@/lib/commands/test-server";
import { isProcessAlive } from "@/lib/process-state";

/** Long enough for a machine that does other things too. */
const PATIENCE_MS = 90_000;

export interface RunningStart {
  home: string;
  port: number;
  /** All it printed so far, both streams. */
  output(): string;
  /** Waits until a line matches. @throws Error with the output when it ended without, or did not in time. */
  untilPrinted(line: RegExp): Promise<void>;
  /** Sends a signal to the command alone. */
  kill(signal: NodeJS.Signals): void;
  /** Sends Ctrl-C as a terminal does: to the command's whole process group. */
  interrupt(): void;
  /** The exit code; null when a signal ended it. */
  ended(): Promise<number | null>;
}

export interface StartOptions {
  home: string;
  port?: number;
  env?: Record<string, string>;
  /** Through npm, as people do; otherwise the command alone. */
  npm?: boolean;
}

const homes = new Set<string>();
const starts = new Set<ChildProcess>();
afterAll(async () => {
  for (const child of starts) if (child.exitCode === null) child.kill("SIGKILL");
  for (const home of homes) {
    for (const pid of processesOf(home)) killOutright(pid);
    await eventually(() => processesOf(home).length === 0);
    rmSync(home, { recursive: true, force: true });
  }
});

/** An empty folder that the database's user can reach too. Everything that still works in it at the end is ended. */
export function makeHome(): string {
  const home = mkdtempSync(join(tmpdir(), "trimwright-start-"));
  chmodSync(home, 0o755);
  homes.add(home);
  // Where PostgreSQL was unpacked for the tests, a new home need not fetch it again.
  const unpacked = privatePackagesFolder(TEST_HOME);
  if (existsSync(unpacked)) symlinkSync(unpacked, privatePackagesFolder(home));
  return home;
}

/** Starts Trimwright with nothing of the test's own environment but the path, without demo data unless `env` says so. */
export async function beginStart(options: StartOptions): Promise<RunningStart> {
  const { home } = options;
  const port = options.port ?? (await findFreePort(0)) ?? 0;
  const env = {
    PATH: process.env.PATH,
    HOME: home,
    NODE_ENV: undefined,
    PORT: String(port),
    TRIMWRIGHT_HOME: home,
    TRIMWRIGHT_DEMO: "0",
    ...options.env,
  } as unknown as NodeJS.ProcessEnv;
  const [program, args] = options.npm ? ["npm", ["start"]] : [process.execPath, [PROGRAMS.bootstrap, "start"]];
  const child = spawn(program, args, { cwd: CHECKOUT, env, detached: true, stdio: ["ignore", "pipe", "pipe"] });
  starts.add(child);
  let text = "";
  for (const stream of [child.stdout, child.stderr]) stream.setEncoding("utf8").on("data", (data) => (text += data));
  const end = once(child, "close").then(([code]) => code as number | null);
  return {
    home,
    port,
    output: () => text,
    untilPrinted: async (line) => {
      const printed = () => text.split("\n").some((one) => line.test(one));
      await eventually(() => printed() || child.exitCode !== null || child.signalCode !== null);
      if (!printed()) throw new Error(`nothing printed like ${line}:\n${text}`);
    },
    kill: (signal) => void child.kill(signal),
    interrupt: () => {
      if (child.pid !== undefined) process.kill(-child.pid, "SIGINT");
    },
    ended: () => end,
  };
}

/** A start that is ready. */
export async function openStart(options: StartOptions): Promise<RunningStart> {
  const start = await beginStart(options);
  await start.untilPrinted(/^ready http:/);
  return start;
}

/** Waits until the condition holds. @throws Error after {@link PATIENCE_MS}. */
export async function eventually(holds: () => boolean | Promise<boolean>): Promise<void> {
  const deadline = Date.now() + PATIENCE_MS;
  while (!(await holds())) {
    if (Date.now() > deadline) throw new Error("it did not happen in time");
    await delay(50);
  }
}

/** What `/api/health` answers; undefined without an answer. */
export async function healthOf({ port }: RunningStart): Promise<{ status: number; body: unknown } | undefined> {
  try {
    const reply = await fetch(`http://127.0.0.1:${port}/api/health`, { signal: AbortSignal.timeout(10_000) });
    return { status: reply.status, body: await reply.json() };
  } catch {
    return undefined; // refused, or cut off while it answered
  }
}

/** Numbers of all living processes that belong to a home: its database's, its app's and its worker's. */
export function processesOf(home: string): number[] {
  const database = join(home, "database");
  return living().filter(
    (pid) => workingFolder(pid) === database || settingsOf(pid).includes(`TRIMWRIGHT_HOME=${home}`),
  );
}

/** Kills a process outright. @throws Error without a process: number 0 would mean all of our own. */
export function killOutright(pid: number | undefined): void {
  if (pid === undefined) throw new Error("no process to kill");
  process.kill(pid, "SIGKILL");
}

/** The app's or the worker's process of a home. */
export function servedProcess(home: string, which: "web" | "worker"): number | undefined {
  const mark = which === "web" ? "next-server" : "bootstrap.mjs\0worker";
  return living().find((pid) => commandOf(pid).includes(mark) && settingsOf(pid).includes(`TRIMWRIGHT_HOME=${home}`));
}

/** The database server's process of a home. */
export function databaseProcess(home: string): number | undefined {
  return findRunningServer(join(home, "database"))?.pid;
}

function living(): number[] {
  return readdirSync("/proc")
    .map(Number)
    .filter((pid) => pid > 0 && isProcessAlive(pid));
}

const settingsOf = (pid: number) => procFile(pid, "environ").split("\0");
const commandOf = (pid: number) => procFile(pid, "cmdline");

function procFile(pid: number, name: string): string {
  try {
    return readFileSync(`/proc/${pid}/${name}`, "utf8");
  } catch {
    return ""; // ended meanwhile
  }
}

function workingFolder(pid: number): string {
  try {
    return readlinkSync(`/proc/${pid}/cwd`);
  } catch {
    return ""; // ended meanwhile
  }
}
