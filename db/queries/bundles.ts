import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";

/** Bytes of one stored piece of a bundle; all pieces but the last are this long. */
export const BUNDLE_CHUNK_BYTES = 1024 * 1024;

export interface BundleRow {
  packageId: string;
  /** Of the lot when the package went live; 0 for a preview. */
  sequence: number;
  byteCount: number;
  sha256: Buffer;
  madeAt: Date;
}

/** A stored bundle's facts. */
export async function findBundle(db: Db, packageId: string, sequence: number): Promise<BundleRow | undefined> {
  const row = await db
    .selectFrom("bundle")
    .select(["packageId", "sequence", "byteCount", "sha256", "madeAt"])
    .where("packageId", "=", packageId)
    .where("sequence", "=", sequence)
    .executeTakeFirst();
  return row && { ...row, byteCount: Number(row.byteCount) };
}

/** Waits until nobody else makes this bundle; held until commit. */
export async function lockBundleMaking(trx: Trx, packageId: string, sequence: number): Promise<void> {
  await sql`select pg_advisory_xact_lock(hashtextextended(${`bundle ${packageId} ${sequence}`}, 0))`.execute(trx);
}

/** Stores one piece; they count from 0. */
export async function insertBundleChunk(
  trx: Trx,
  chunk: { packageId: string; sequence: number; position: number; content: Buffer },
): Promise<void> {
  await trx.insertInto("bundleChunk").values(chunk).execute();
}

/** Stores a bundle's facts once its pieces are in. */
export async function insertBundle(trx: Trx, row: BundleRow): Promise<void> {
  await trx.insertInto("bundle").values(row).execute();
}

/** One piece of a bundle; undefined after the last. */
export async function findBundleChunk(
  db: Db,
  packageId: string,
  sequence: number,
  position: number,
): Promise<Buffer | undefined> {
  const row = await db
    .selectFrom("bundleChunk")
    .select("content")
    .where("packageId", "=", packageId)
    .where("sequence", "=", sequence)
    .where("position", "=", position)
    .executeTakeFirst();
  return row?.content;
}
