/** The app and its worker as two processes of their own over a bench's database. */
import { type ChildProcess, spawn } from "node:child_process";
import { once } from "node:events";
import { readFileSync } from "node:fs";
import { setTimeout as delay } from "node:timers/promises";
import { findFreePort } from "@/db/free-port";
import { sessionCookieName, sessionToken } from "@/lib/auth/session-token";
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { actionsKey, authSecret, childEnv, env, setEnv } from "@/lib/env";

const READY_WITHIN_MS = 60_000;

export interface Served {
  origin: string;
  web: ChildProcess;
  worker: ChildProcess;
}

/** Runs work beside a served app, and ends both processes afterwards. The app has to be built. */
export async function withServedApp<T>(work: (served: Served) => Promise<T>): Promise<T> {
  const port = await findFreePort(0);
  const origin = `http://127.0.0.1:${port}`;
  setEnv({ TRIMWRIGHT_ORIGIN: origin, NEXTAUTH_URL: origin });
  const web = launch(["--import", PROGRAMS.tellLength, PROGRAMS.next, "start", "-H", "127.0.0.1", "-p", String(port)]);
  const worker = launch([PROGRAMS.bootstrap, "worker"]);
  try {
    await untilHealthy(origin);
    return await work({ origin, web, worker });
  } finally {
    for (const child of [web, worker]) {
      child.kill("SIGTERM");
      if (child.exitCode === null && child.signalCode === null) await once(child, "exit");
    }
  }
}

function launch(args: readonly string[]): ChildProcess {
  const { databaseUrl, home, origin } = env();
  return spawn(process.execPath, args, {
    cwd: CHECKOUT,
    stdio: ["ignore", "ignore", "inherit"],
    env: childEnv({
      NODE_ENV: "production",
      NEXT_TELEMETRY_DISABLED: "1",
      DATABASE_URL: databaseUrl,
      TRIMWRIGHT_HOME: home,
      TRIMWRIGHT_ORIGIN: origin,
      NEXTAUTH_URL: origin,
      NEXTAUTH_SECRET: authSecret(),
      NEXT_SERVER_ACTIONS_ENCRYPTION_KEY: actionsKey(),
    }),
  });
}

async function untilHealthy(origin: string): Promise<void> {
  const deadline = Date.now() + READY_WITHIN_MS;
  for (;;) {
    const reply = await fetch(`${origin}/api/health`).catch(() => undefined); // not listening yet
    if (reply?.status === 200) return;
    if (Date.now() > deadline) throw new Error(`the app is not healthy: ${reply?.status ?? "no answer"}`);
    await delay(200);
  }
}

/** Calls the served app as a signed-in person. */
export async function callAs(served: Served, sessionId: string, path: string, body?: object): Promise<Response> {
  return fetch(`${served.origin}/api/v1${path}`, {
    method: body ? "POST" : "GET",
    headers: {
      cookie: `${sessionCookieName()}=${await sessionToken(sessionId)}`,
      origin: served.origin,
      ...(body && { "content-type": "application/json" }),
    },
    ...(body && { body: JSON.stringify(body) }),
  });
}

/** Most memory that a process ever had, MB: VmHWM of proc(5). */
export function peakMegabytes({ pid }: ChildProcess): number {
  const line = /^VmHWM:\s+(\d+) kB$/m.exec(readFileSync(`/proc/${pid}/status`, "utf8"));
  return Number(line?.[1]) / 1024;
}

/** Milliseconds that each of many questions for the app's health took, asked one after the other until told to stop. */
export async function watchHealth(served: Served, stopped: () => boolean): Promise<number[]> {
  const times: number[] = [];
  while (!stopped()) {
    const from = performance.now();
    const reply = await fetch(`${served.origin}/api/health`);
    await reply.arrayBuffer();
    if (reply.status !== 200) throw new Error(`health answered ${reply.status}`);
    times.push(performance.now() - from);
    await delay(20);
  }
  return times;
}

/** The value that 99 of 100 do not exceed. */
export function p99(values: readonly number[]): number {
  const rising = [...values].sort((a, b) => a - b);
  return rising[Math.ceil(rising.length * 0.99) - 1] as number;
}
