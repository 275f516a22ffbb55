/** Does waiting jobs at once instead of waiting for the worker: for the demo's seed and for tests. */
import { CompiledQuery } from "kysely";
import PgBoss from "pg-boss";
import type { Db } from "@/db/executor";
import type { JobPayloads } from "./payloads";
import { QUEUES, type QueueName } from "./queues";

export type JobRunner = { [Q in QueueName]?: (payload: JobPayloads[Q]) => Promise<void> };

const BATCH = 100;

/**
 * Does every waiting job of the queues that have a runner, and those that these put on queues, until none is left.
 * @returns how many were done
 * @throws what a job threw, after marking it failed
 */
export async function drainJobs(db: Db, runners: JobRunner): Promise<number> {
  const executeSql = async (text: string, values: unknown[]) => {
    const { rows } = await db.executeQuery(CompiledQuery.raw(text, values));
    return { rows: rows as never[] };
  };
  const boss = new PgBoss({ db: { executeSql }, schema: "pgboss", migrate: false, supervise: false, schedule: false });
  let done = 0;
  for (let before = -1; before !== done; ) {
    before = done;
    for (const queue of QUEUES) done += await drainQueue(boss, queue, runners[queue] as JobRunner["derive"]);
  }
  return done;
}

async function drainQueue(boss: PgBoss, queue: QueueName, run: JobRunner["derive"]): Promise<number> {
  if (run === undefined) return 0;
  const jobs = await boss.fetch<JobPayloads["derive"]>(queue, { batchSize: BATCH });
  for (const job of jobs) {
    try {
      await run(job.data);
    } catch (error) {
      await boss.fail(queue, job.id);
      throw error;
    }
    await boss.complete(queue, job.id);
  }
  return jobs.length;
}
