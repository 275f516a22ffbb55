/** `npm start`: everything that Trimwright needs on this machine, until Ctrl-C. */
import { mkdirSync, statfsSync } from "node:fs";
import { join } from "node:path";
import { setTimeout as delay } from "node:timers/promises";
import { findFreePort } from "@/db/free-port";
import { ensureBuild, markServed } from "@/lib/commands/build-app";
import { PROGRAMS } from "@/lib/commands/checkout";
import { plainMessage } from "@/lib/commands/command-line";
import { type ProcessLock, tryLock } from "@/lib/commands/process-lock";
import {
  findFirstAdminLink,
  listDemoAccounts,
  openStartDatabase,
  type StartDatabase,
} from "@/lib/commands/start-database";
import { type SupervisedProcess, supervise } from "@/lib/commands/supervised-process";
import { DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import { actionsKey, authSecret, childEnv, type Env, env, largePagesEnv, setEnv, signingKeyFile } from "@/lib/env";
import { AppError } from "@/lib/errors";

const FREE_BYTES_NEEDED = 300_000_000;
const READY_WITHIN_MS = 60_000;
const CRASHES_BEFORE_GIVING_UP = 3;
const DATABASE_LOOK_MS = 2_000;

export default async function start(_args: string[], signal: AbortSignal): Promise<number> {
  const settings = env();
  const lock = takeHome(settings.home);
  try {
    assertDiskSpace(settings.home);
    await assertPortFree(settings);
    const database = await openStartDatabase({ settings, signal, say });
    try {
      setEnv({ DATABASE_URL: database.appUrl });
      await ensureBuild({ signal, say });
      const served = markServed();
      try {
        await serve(settings, database, signal);
      } finally {
        served.release();
      }
    } finally {
      await database.stop();
      say("Stopped.");
    }
  } finally {
    lock.release();
  }
  return 0;
}

function say(line: string): void {
  console.log(line);
}

/** @throws AppError `start.already_running` {pid} */
function takeHome(home: string): ProcessLock {
  mkdirSync(home, { recursive: true });
  const lock = tryLock(join(home, "start.lock"));
  if ("release" in lock) return lock;
  throw new AppError("start.already_running", {
    pid: lock.heldBy,
    message: `Trimwright is already running with ${home} (process ${lock.heldBy}); stop it first or set TRIMWRIGHT_HOME`,
  });
}

/** @throws AppError `start.disk_full` {freeBytes, neededBytes} */
export function assertDiskSpace(folder: string, neededBytes = FREE_BYTES_NEEDED): void {
  const { bavail, bsize } = statfsSync(folder);
  const freeBytes = bavail * bsize;
  if (freeBytes >= neededBytes) return;
  const mb = (bytes: number) => Math.floor(bytes / 1_000_000);
  throw new AppError("start.disk_full", {
    freeBytes,
    neededBytes,
    message: `Disk full: ${mb(freeBytes)} MB free in ${folder}, ${mb(neededBytes)} MB needed`,
  });
}

/** @throws AppError `start.port_taken` {port} */
export async function assertPortFree({ host, port }: Pick<Env, "host" | "port">): Promise<void> {
  if ((await findFreePort(port, host)) !== undefined) return;
  throw new AppError("start.port_taken", {
    port,
    message: `Port ${port} on ${host} cannot be used, most likely another program has it; choose one with PORT=3001 npm start`,
  });
}

async function serve(settings: Env, database: StartDatabase, signal: AbortSignal): Promise<void> {
  const childSettings = servedEnv(settings, database.appUrl);
  const logs = join(settings.home, "logs");
  const listen = ["-H", settings.host, "-p", String(settings.port)];
  const web = supervise({
    name: "web",
    args: ["--import", PROGRAMS.tellLength, PROGRAMS.next, "start", ...listen],
    env: childSettings,
    logFile: join(logs, "web.log"),
    say,
  });
  const worker = supervise({
    name: "worker",
    args: [PROGRAMS.bootstrap, "worker"],
    env: childSettings,
    logFile: join(logs, "worker.log"),
    say,
  });
  try {
    await waitUntilHealthy(settings, web, signal);
    await announce(settings, database);
    await watchDatabase(database, signal);
  } finally {
    say("Stopping …");
    await Promise.all([web.stop(), worker.stop()]);
  }
}

/** What the served processes get: the app's role, never the owner's address. */
function servedEnv(settings: Env, appUrl: string): NodeJS.ProcessEnv {
  return childEnv({
    ...largePagesEnv(),
    NODE_ENV: "production",
    npm_lifecycle_event: undefined,
    NEXT_TELEMETRY_DISABLED: "1",
    DATABASE_URL: appUrl,
    TRIMWRIGHT_OWNER_URL: undefined,
    TRIMWRIGHT_HOME: settings.home,
    TRIMWRIGHT_ORIGIN: settings.origin,
    TRIMWRIGHT_SIGNING_KEY_FILE: signingKeyFile(),
    NEXTAUTH_URL: settings.origin,
    NEXTAUTH_SECRET: authSecret(),
    NEXT_SERVER_ACTIONS_ENCRYPTION_KEY: actionsKey(),
  });
}

/** @throws AppError `start.web_failed` with the last line of its log. */
async function waitUntilHealthy(settings: Env, web: SupervisedProcess, signal: AbortSignal): Promise<void> {
  const host = ["0.0.0.0", "::"].includes(settings.host) ? "127.0.0.1" : settings.host;
  const deadline = Date.now() + READY_WITHIN_MS;
  let last = "no answer";
  while (Date.now() < deadline && web.crashes() < CRASHES_BEFORE_GIVING_UP) {
    signal.throwIfAborted();
    try {
      const reply = await fetch(`http://${host}:${settings.port}/api/health`, { signal: AbortSignal.timeout(5_000) });
      if (reply.status === 200) return;
      last = `status ${reply.status}`;
    } catch (error) {
      last = error instanceof Error ? error.message : String(error); // not listening yet
    }
    await delay(100, undefined, { signal });
  }
  throw new AppError("start.web_failed", { last, message: `The app does not answer (${last}): ${web.lastLine()}` });
}

async function announce(settings: Env, database: StartDatabase): Promise<void> {
  if (database.demo) {
    say(`Accounts of the demo, all with the password ${DEMO_PASSWORD}:`);
    for (const { email, roles } of await listDemoAccounts(database.appUrl)) say(`  ${email.padEnd(28)} ${roles}`);
  } else {
    const link = await findFirstAdminLink(database.appUrl);
    if (link !== undefined) say(`Nobody can sign in yet. The first admin chooses a password here, once:\n  ${link}`);
  }
  say(`ready http://127.0.0.1:${settings.port}`);
}

/** Until Ctrl-C: brings our own database server back if it ended. */
async function watchDatabase(database: StartDatabase, signal: AbortSignal): Promise<void> {
  while (!signal.aborted) {
    await delay(DATABASE_LOOK_MS, undefined, { signal }).catch((error: Error) => {
      if (error.name !== "AbortError") throw error;
    });
    if (signal.aborted) return;
    try {
      if (await database.revive()) say("The database had ended and was started again.");
    } catch (error) {
      say(`The database cannot be started again yet: ${plainMessage(error)}`);
    }
  }
}
