import { CompiledQuery } from "kysely";
import PgBoss from "pg-boss";
import type { Trx } from "@/db/executor";
import type { JobPayloads } from "./payloads";
import type { QueueName } from "./queues";

/** Never started: it only writes rows through the transaction it is handed. */
let sender: PgBoss | undefined;

/**
 * Puts a job on its queue in the caller's transaction: it exists exactly if what it works on does.
 * @throws Error when the queue does not exist (the library then answers null and says nothing)
 */
export async function enqueue<Q extends QueueName>(
  trx: Trx,
  queue: Q,
  payload: JobPayloads[Q],
  options: { singletonKey?: string } = {},
): Promise<string> {
  const executeSql = async (text: string, values: unknown[]) => {
    const { rows } = await trx.executeQuery(CompiledQuery.raw(text, values));
    return { rows: rows as never[] };
  };
  sender ??= new PgBoss({ db: { executeSql }, schema: "pgboss", migrate: false, supervise: false, schedule: false });
  const jobId = await sender.send(queue, payload, {
    ...options,
    retryLimit: 3,
    retryDelay: 2,
    retryBackoff: true,
    expireInMinutes: 30,
    db: { executeSql },
  });
  if (jobId === null) throw new Error(`The queue ${queue} is not there; run the migrations.`);
  return jobId;
}
