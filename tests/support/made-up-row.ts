/** Rows for tests of what a table refuses: their content does not matter, only that they are there. */
import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** What checks of single columns ask for; any other column takes a value of its type. */
const VALUES: Record<string, string> = {
  act: "'wrote'",
  code: "'A'",
  decision: "'approve'",
  fit_order: "1",
  kind: "'hold'",
  method: "'individual'",
  number: "1",
  outcome: "'verified'",
  purpose: "'sample'",
  result: "'written'",
  role: "'sample'",
  serial: "'A'",
  severity: "'note'",
  state: "'draft'",
  subject_kind: "'layout'",
  verdict: "'pass'",
  version: "'1.1.1'",
};

const VALUE_BY_TYPE: Record<string, string> = {
  uuid: "gen_random_uuid()",
  text: "'x'",
  bytea: "'\\x00'",
  jsonb: "'{}'",
  integer: "1",
  bigint: "1",
  boolean: "false",
  "double precision": "1",
  "timestamp with time zone": "now()",
  date: "current_date",
  "text[]": "'{}'",
};

/**
 * Puts one row into a table as its owner, past foreign keys and triggers.
 * @param given SQL of columns whose value matters here.
 */
export async function insertMadeUpRow(
  owner: Db,
  table: string,
  given: Record<string, string | undefined> = {},
): Promise<void> {
  const { rows } = await sql<{ name: string; type: string; needed: boolean }>`
    select attname as "name", format_type(atttypid, null) as "type", attnotnull and not atthasdef as "needed"
    from pg_attribute where attrelid = ${`public.${table}`}::regclass and attnum > 0 and not attisdropped
  `.execute(owner);
  const columns = rows.filter(({ name, needed }) => needed || given[name] !== undefined);
  const values = columns.map(({ name, type }) => given[name] ?? VALUES[name] ?? VALUE_BY_TYPE[type] ?? "null");
  await owner.transaction().execute(async (trx) => {
    await sql`set local session_replication_role = replica`.execute(trx);
    const names = sql.join(columns.map(({ name }) => sql.id(name)));
    await sql`insert into ${sql.table(table)} (${names}) values (${sql.raw(values.join(", "))})`.execute(trx);
  });
}
