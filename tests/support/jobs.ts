/** Does the waiting jobs of a test's database, as the worker would, until none is left. */
import { CompiledQuery } from "kysely";
import PgBoss from "pg-boss";
import { v7 as uuidv7 } from "uuid";
import type { Db } from "@/db/executor";
import { jobHandlers } from "@/lib/commands/job-handlers";
import { QUEUES, type QueueName } from "@/lib/jobs/queues";
import type { Ctx } from "@/lib/services/context";

/** @returns how many jobs were done. @throws what a job threw, after marking it failed */
export async function drainJobs(db: Db): Promise<number> {
  const executeSql = async (text: string, values: unknown[]) => {
    const { rows } = await db.executeQuery(CompiledQuery.raw(text, values));
    return { rows: rows as never[] };
  };
  const boss = new PgBoss({ db: { executeSql }, schema: "pgboss", migrate: false, supervise: false, schedule: false });
  let done = 0;
  for (let before = -1; before !== done; ) {
    before = done;
    for (const queue of QUEUES) done += await drainQueue(boss, db, queue);
  }
  return done;
}

async function drainQueue(boss: PgBoss, db: Db, queue: QueueName): Promise<number> {
  const handle = jobHandlers[queue] as ((ctx: Ctx, payload: object) => Promise<void>) | undefined;
  if (handle === undefined) return 0;
  const jobs = await boss.fetch<object>(queue, { batchSize: 100 });
  for (const job of jobs) {
    try {
      await handle(systemContext(db), job.data);
    } catch (error) {
      await boss.fail(queue, job.id);
      throw error;
    }
    await boss.complete(queue, job.id);
  }
  return jobs.length;
}

/** The product itself, for services that no person calls. */
export function systemContext(db: Db): Ctx {
  return { db, actor: { kind: "system" }, now: () => new Date(), newId: uuidv7, requestId: uuidv7(), address: "" };
}
