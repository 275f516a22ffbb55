import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";

export type LiveKind = "release" | "reinstatement" | "withdrawal";

export interface LivePeriodRow {
  id: string;
  lotId: string;
  sequence: number;
  kind: LiveKind;
  packageId: string;
  reason: string | null;
  personId: string;
  startedAt: Date;
  /** release.json as signed; null for a withdrawal. */
  releaseDocument: Buffer | null;
  /** 64 bytes, Ed25519. */
  signature: Buffer | null;
  keyId: string | null;
}

const livePeriodColumns = [
  "livePeriod.id",
  "livePeriod.lotId",
  "livePeriod.sequence",
  "livePeriod.kind",
  "livePeriod.packageId",
  "livePeriod.reason",
  "livePeriod.personId",
  "livePeriod.startedAt",
  "livePeriod.releaseDocument",
  "livePeriod.signature",
  "livePeriod.keyId",
] as const;

/** Every change of what was live for a lot, oldest first. */
export async function listLivePeriods(
  db: Db,
  lotId: string,
): Promise<(LivePeriodRow & { version: string; personName: string })[]> {
  const rows = await db
    .selectFrom("livePeriod")
    .innerJoin("package", "package.id", "livePeriod.packageId")
    .innerJoin("person", "person.id", "livePeriod.personId")
    .select(livePeriodColumns)
    .select(["package.version", "person.name as personName"])
    .where("livePeriod.lotId", "=", lotId)
    .orderBy("livePeriod.sequence")
    .execute();
  return rows.map((row) => ({ ...row, kind: row.kind as LiveKind }));
}

/** The newest time a package went live: release or reinstatement. */
export async function findNewestRelease(db: Db, packageId: string): Promise<LivePeriodRow | undefined> {
  const row = await db
    .selectFrom("livePeriod")
    .select(livePeriodColumns)
    .where("packageId", "=", packageId)
    .where("kind", "!=", "withdrawal")
    .orderBy("sequence", "desc")
    .limit(1)
    .executeTakeFirst();
  return row && { ...row, kind: row.kind as LiveKind };
}

/** The newest change that names a package, a withdrawal included. */
export async function findNewestPeriod(db: Db, packageId: string): Promise<LivePeriodRow | undefined> {
  const row = await db
    .selectFrom("livePeriod")
    .select(livePeriodColumns)
    .where("packageId", "=", packageId)
    .orderBy("sequence", "desc")
    .limit(1)
    .executeTakeFirst();
  return row && { ...row, kind: row.kind as LiveKind };
}

/** The newest sequence that names each package; packages that never went live are left out. */
export async function listNewestSequences(db: Db, packageIds: readonly string[]): Promise<Map<string, number>> {
  if (packageIds.length === 0) return new Map();
  const rows = await db
    .selectFrom("livePeriod")
    .select(["packageId", sql<number>`max(sequence)`.as("sequence")])
    .where("packageId", "in", [...packageIds])
    .groupBy("packageId")
    .execute();
  return new Map(rows.map((row) => [row.packageId, row.sequence]));
}

/** Records a change of what is live and raises the lot's sequence. @throws `lot.sequence_falls` as raised by the database */
export async function insertLivePeriod(trx: Trx, row: LivePeriodRow): Promise<void> {
  await trx.insertInto("livePeriod").values(row).execute();
  await trx.updateTable("lot").set({ sequence: row.sequence }).where("id", "=", row.lotId).execute();
}
