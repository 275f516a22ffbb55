import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";

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
