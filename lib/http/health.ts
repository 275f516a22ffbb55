import { setTimeout as delay } from "node:timers/promises";
import { openDb } from "@/db/client";
import { env } from "@/lib/env";
import { log } from "@/lib/log";
import { checkHealth, type Health } from "@/lib/services/health/check-health";
import packageJson from "@/package.json";
import type { HealthReply } from "@/schemas/api/health";

/** A part that has not answered by then is down. */
const ANSWER_WITHIN_MS = 4_000;

let looking: Promise<Health> | undefined;

/**
 * `GET /api/health`: 200 where everything works, 503 naming the part that is down. Looks through a connection of its own, so
 * that a busy pool is no illness and a dead one no wait; requests that come meanwhile share the look.
 */
export async function answerHealth(): Promise<Response> {
  looking ??= look().finally(() => {
    looking = undefined;
  });
  const { database, queue, reasons } = await looking;
  const ok = database === "ok" && queue === "ok";
  if (!ok) log.warn({ reasons }, "not healthy");
  const body: HealthReply = { status: ok ? "ok" : "down", database, queue, version: packageJson.version };
  return Response.json(body, { status: ok ? 200 : 503, headers: { "cache-control": "no-store" } });
}

async function look(): Promise<Health> {
  const down = (reason: string): Health => ({ database: "down", queue: "down", reasons: [reason] });
  try {
    const { databaseUrl } = env();
    if (databaseUrl === undefined) return down("DATABASE_URL is not set");
    const db = openDb(databaseUrl, {
      applicationName: "trimwright-health",
      maxConnections: 1,
      connectTimeoutMs: ANSWER_WITHIN_MS,
      statementTimeoutMs: ANSWER_WITHIN_MS,
    });
    const late = delay(ANSWER_WITHIN_MS, down("no answer in time"), { ref: false });
    const health = await Promise.race([checkHealth(db), late]);
    db.destroy().catch((error: Error) => log.warn({ err: error }, "health connection not closed"));
    return health;
  } catch (error) {
    return down(error instanceof Error ? error.message : String(error));
  }
}
