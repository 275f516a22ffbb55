/** The access log: sign-ins and their failures, polls and downloads, kept for a time and apart from the ledger. */
import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";

export type AccessKind =
  | "sign-in"
  | "sign-in.failed"
  | "sign-out"
  | "confirm.failed"
  | "link.asked"
  | "link.used"
  | "station.poll"
  | "download";

export interface NewAccess {
  at: Date;
  kind: AccessKind;
  personId: string | null;
  stationId?: string | null;
  address: string;
  /** Facts such as the address of an unknown account's e-mail as a hash; never a password or code. */
  detail?: Record<string, string>;
}

/** Notes an access. @returns the entry's number */
export async function insertAccess(db: Db, access: NewAccess): Promise<string> {
  const detail = JSON.stringify(access.detail ?? {});
  const row = await db
    .insertInto("accessLog")
    .values({ ...access, detail })
    .returning("id")
    .executeTakeFirstOrThrow();
  return row.id;
}

/** Takes back the note of an attempt that turned out right. */
export async function deleteAccess(db: Db, id: string): Promise<void> {
  await db.deleteFrom("accessLog").where("id", "=", id).execute();
}

/** Deletes what is older than its retention. @returns how many entries */
export async function deleteAccessBefore(db: Db, before: Date): Promise<number> {
  const result = await db.deleteFrom("accessLog").where("at", "<", before).executeTakeFirst();
  return Number(result.numDeletedRows);
}

/** Lets attempts against one subject go through the count one after the other, until commit. */
export async function lockAttempts(trx: Trx, kind: AccessKind, subject: string): Promise<void> {
  await sql`select pg_advisory_xact_lock(hashtextextended(${`${kind} ${subject}`}, 0))`.execute(trx);
}

/** How many attempts of a kind were noted against one subject since a time. */
export async function countAttempts(db: Db, kind: AccessKind, subject: string, since: Date): Promise<number> {
  const { count } = await db
    .selectFrom("accessLog")
    .select((eb) => eb.fn.countAll<string>().as("count"))
    .where("kind", "=", kind)
    .where("at", ">", since)
    .where(sql<string>`detail->>'subject'`, "=", subject)
    .executeTakeFirstOrThrow();
  return Number(count);
}
