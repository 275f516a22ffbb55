import { type Kysely, sql } from "kysely";

/**
 * What a derivation says beside its values: its uncertainty budget and its survey of the error envelope. Null for those
 * derived before there were such statements, and for imports; `guard_derivation` keeps them as it keeps every column.
 */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`alter table derivation add column uncertainty jsonb, add column envelope jsonb`.execute(db);
}
