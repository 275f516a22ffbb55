/** `npm run worker`: takes jobs from the queues and hands each to its service, until it is asked to stop. */
import { once } from "node:events";
import PgBoss from "pg-boss";
import { v7 } from "uuid";
import { closeDb, getDb } from "@/db/client";
import { assertAppRoleIsWeak } from "@/db/roles";
import { JobClaims } from "@/lib/commands/job-claims";
import { jobHandlers } from "@/lib/commands/job-handlers";
import { env } from "@/lib/env";
import type { JobPayloads } from "@/lib/jobs/payloads";
import { QUEUES, type QueueName, WORKER_NAME } from "@/lib/jobs/queues";
import type { Ctx } from "@/lib/services/context";
import { endGivenUp } from "@/lib/services/tidy/end-given-up";

/** Time for running jobs at a stop; one that needs longer is taken up again by the next worker. */
const FINISH_WITHIN_MS = 10_000;
const POLL_SECONDS = 0.5;
/** How often jobs are looked for whose worker was killed. */
const LOOK_MS = 15_000;
/** At seven minutes past every hour. */
const TIDY_AT = "7 * * * *";

export default async function worker(_args: string[], signal: AbortSignal): Promise<number> {
  await assertAppRoleIsWeak(getDb());
  const boss = new PgBoss({
    connectionString: env().databaseUrl,
    application_name: WORKER_NAME,
    schema: "pgboss",
    migrate: false,
    max: 4,
  });
  boss.on("error", (error) => console.error(`job queues: ${error.message}`));
  await boss.start();
  const claims = await JobClaims.open(getDb());
  const looking = setInterval(() => lookAfterLost(boss, claims), LOOK_MS);
  try {
    for (const queue of QUEUES) await serveQueue(boss, claims, queue);
    await lookAfterLost(boss, claims);
    await boss.schedule("tidy" satisfies QueueName, TIDY_AT);
    console.log("worker ready");
    if (!signal.aborted) await once(signal, "abort");
  } finally {
    clearInterval(looking);
    await boss.stop({ graceful: true, wait: true, timeout: FINISH_WITHIN_MS });
    claims.close();
    await closeDb();
  }
  return 0;
}

/** Puts jobs of workers that were killed on their queues again; the queue counts it as a try, and after the last one the work ends. */
async function lookAfterLost(boss: PgBoss, claims: JobClaims): Promise<void> {
  try {
    for (const { id, queue } of await claims.findLost()) {
      await boss.fail(queue, id, { message: "the worker ended" });
      console.log(`taken up again: ${queue} ${id}`);
    }
    const ended = await endGivenUp(systemCtx("given up"));
    if (ended > 0) console.log(`given up: ${ended}`);
  } catch (error) {
    console.error(`lost jobs: ${error instanceof Error ? error.message : String(error)}`);
  }
}

async function serveQueue<Q extends QueueName>(boss: PgBoss, claims: JobClaims, queue: Q): Promise<void> {
  const handle = jobHandlers[queue];
  if (handle === undefined) return;
  await boss.work<JobPayloads[Q]>(queue, { batchSize: 1, pollingIntervalSeconds: POLL_SECONDS }, async (jobs) => {
    for (const job of jobs) await claims.during(job.id, () => handle(systemCtx(job.id), job.data));
  });
}

function systemCtx(requestId: string): Ctx {
  return { db: getDb(), actor: { kind: "system" }, now: () => new Date(), newId: v7, requestId, address: "" };
}
