import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import { isUuid } from "@/db/queries/code-or-id";

/** Takes the chain's lock until commit and returns the newest event's place and hash. */
export async function lockLedgerHead(trx: Trx): Promise<{ seq: number; hash: Buffer } | undefined> {
  await sql`select pg_advisory_xact_lock(7283001)`.execute(trx);
  return findLedgerHead(trx);
}

/** The newest event's place and hash, undefined on an empty ledger. */
export async function findLedgerHead(db: Db): Promise<{ seq: number; hash: Buffer } | undefined> {
  const row = await db
    .selectFrom("ledgerEvent")
    .select(["seq", "hash"])
    .orderBy("seq", "desc")
    .limit(1)
    .executeTakeFirst();
  return row && { seq: Number(row.seq), hash: row.hash };
}

export interface LedgerRow {
  seq: number;
  at: Date;
  actor: string;
  action: string;
  subject: string;
  canonical: string;
  previous: Buffer;
  hash: Buffer;
}

/** Stores one event as hashed. The database refuses it unless it continues the chain. */
export async function insertLedgerEvent(trx: Trx, row: LedgerRow): Promise<void> {
  await trx.insertInto("ledgerEvent").values(row).execute();
}

/** Stores the erasable texts of an event. */
export async function insertLedgerTexts(
  trx: Trx,
  rows: readonly { seq: number; name: string; salt: Buffer; content: string }[],
): Promise<void> {
  if (rows.length > 0)
    await trx
      .insertInto("ledgerText")
      .values([...rows])
      .execute();
}

const eventColumns = ["seq", "at", "actor", "action", "subject", "canonical", "previous", "hash"] as const;

export interface LedgerFilter {
  limit: number;
  order: "asc" | "desc";
  /** Place of the last event of the page before. */
  cursor?: number;
  subject?: string;
  /** An action, or the beginning of one. */
  action?: string;
  actor?: string;
  from?: string;
  to?: string;
}

/** Events in the order asked for. */
export async function listLedgerEvents(db: Db, filter: LedgerFilter): Promise<LedgerRow[]> {
  const { limit, order, cursor, subject, action, actor, from, to } = filter;
  let query = db.selectFrom("ledgerEvent").select(eventColumns).orderBy("seq", order).limit(limit);
  if (cursor !== undefined) query = query.where("seq", order === "desc" ? "<" : ">", String(cursor));
  if (subject !== undefined) query = query.where("subject", "=", subject);
  if (action !== undefined) query = query.where(sql<boolean>`starts_with(action, ${action})`);
  if (actor !== undefined) query = query.where("actor", "=", actor);
  if (from !== undefined) query = query.where("at", ">=", new Date(from));
  if (to !== undefined) query = query.where("at", "<=", new Date(to));
  return (await query.execute()).map((row) => ({ ...row, seq: Number(row.seq) }));
}

/** The whole ledger up to a place, oldest first, some at a time. */
export async function* eachLedgerEvents(db: Db, until: number, size = 1_000): AsyncGenerator<LedgerRow[]> {
  for (let cursor = 0; cursor < until; ) {
    const found = await listLedgerEvents(db, { limit: size, order: "asc", cursor });
    const rows = found.filter((row) => row.seq <= until);
    if (rows.length > 0) yield rows;
    if (found.length < size) return;
    cursor = found.at(-1)?.seq ?? until;
  }
}

export interface LedgerTextRow {
  seq: number;
  name: string;
  salt: Buffer;
  /** Null once erased. */
  content: string | null;
}

/** Erasable texts of the events. */
export async function listLedgerTexts(db: Db, seqs: readonly number[]): Promise<LedgerTextRow[]> {
  if (seqs.length === 0) return [];
  const rows = await db
    .selectFrom("ledgerText")
    .select(["seq", "name", "salt", "content"])
    .where(sql<boolean>`seq = any(${seqs as number[]}::bigint[])`)
    .orderBy("seq")
    .orderBy("name")
    .execute();
  return rows.map((row) => ({ ...row, seq: Number(row.seq) }));
}

/** Names of people and stations by id, for showing who did something. */
export async function listActorNames(db: Db, ids: readonly string[]): Promise<Map<string, string>> {
  const uuids = ids.filter(isUuid);
  const { rows } = await sql<{ id: string; name: string }>`
    select id::text, name from person where id = any(${uuids}::uuid[])
    union all select id::text, name from station where id = any(${uuids}::uuid[])
  `.execute(db);
  return new Map(rows.map((row) => [row.id, row.name]));
}

/** Heads of the ledger that signed releases name, as lower-case hex. */
export async function listReleasedHeads(db: Db): Promise<string[]> {
  const { rows } = await sql<{ head: string | null }>`
    select convert_from(release_document, 'UTF8')::jsonb ->> 'ledgerHead' as head
    from live_period where release_document is not null
  `.execute(db);
  return rows.flatMap((row) => (row.head === null ? [] : [row.head]));
}
