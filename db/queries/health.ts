import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** Whether the database answers at all. @throws what the driver throws */
export async function askDatabase(db: Db): Promise<void> {
  await sql`select 1`.execute(db);
}

/** Names of the job queues that are there. @throws what the driver throws, as where their schema is missing */
export async function listQueueNames(db: Db): Promise<string[]> {
  const { rows } = await sql<{ name: string }>`select name from pgboss.queue`.execute(db);
  return rows.map(({ name }) => name);
}

/** Whether a session of that application name is connected to this database now; the same role sees its own. */
export async function isConnected(db: Db, applicationName: string): Promise<boolean> {
  const { rows } = await sql<{ connected: boolean }>`
    select exists (
      select 1 from pg_stat_activity where datname = current_database() and application_name = ${applicationName}
    ) as connected`.execute(db);
  return rows[0]?.connected === true;
}
