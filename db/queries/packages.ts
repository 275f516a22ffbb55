import { type Insertable, sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { Json, Package } from "@/db/generated/types.generated";
import { AppError } from "@/lib/errors";

export type PackageState =
  | "building"
  | "draft"
  | "failed"
  | "in-review"
  | "approved"
  | "refused"
  | "live"
  | "superseded"
  | "withdrawn";

const packageColumns = [
  "package.id",
  "package.lotId",
  "lot.code as lotCode",
  "package.layoutId",
  "layout.version as layoutVersion",
  "family.code as familyCode",
  "package.familyRevisionId",
  "package.version",
  "package.versionMajor",
  "package.versionMinor",
  "package.versionPatch",
  "package.firmware",
  "package.notes",
  "package.state",
  "package.digest",
  "package.againstDigest",
  "package.reviewDigest",
  "package.counts",
  "package.progressDone",
  "package.progressTotal",
  "package.progressStep",
  "package.failure",
  "package.rebuild",
  "package.createdAt",
  "package.createdBy",
  "package.builtAt",
  "package.submittedAt",
  "package.submittedBy",
  "package.approvedAt",
] as const;

const packagesWithNames = (db: Db) =>
  db
    .selectFrom("package")
    .innerJoin("lot", "lot.id", "package.lotId")
    .innerJoin("family", "family.id", "lot.familyId")
    .innerJoin("layout", "layout.id", "package.layoutId")
    .select(packageColumns);

/** A package with the codes of its lot and family and its layout's version. */
export type PackageRow = Omit<Awaited<ReturnType<typeof findPackage>> & object, "state"> & { state: PackageState };

const notFound = (id: string) => () => new AppError("package.not_found", { id, message: "There is no such package." });

/** A package by id. */
export function findPackage(db: Db, id: string) {
  return packagesWithNames(db).where("package.id", "=", id).executeTakeFirst();
}

/** A package by id. @throws AppError `package.not_found` */
export async function getPackage(db: Db, id: string): Promise<PackageRow> {
  return (await packagesWithNames(db).where("package.id", "=", id).executeTakeFirstOrThrow(notFound(id))) as PackageRow;
}

/** A package, locked until commit. @throws AppError `package.not_found` */
export async function lockPackage(trx: Trx, id: string): Promise<PackageRow> {
  const row = await packagesWithNames(trx)
    .where("package.id", "=", id)
    .forUpdate(["package"])
    .executeTakeFirstOrThrow(notFound(id));
  return row as PackageRow;
}

/** The package that is live for a lot. */
export async function findLivePackage(db: Db, lotId: string): Promise<PackageRow | undefined> {
  const row = await packagesWithNames(db)
    .where("package.lotId", "=", lotId)
    .where("package.state", "=", "live")
    .executeTakeFirst();
  return row as PackageRow | undefined;
}

/** A lot's packages, newest first, at most `limit`, older than the cursor's id. */
export async function listPackages(
  db: Db,
  lotId: string,
  page: { limit: number; cursor?: string },
): Promise<PackageRow[]> {
  let query = packagesWithNames(db).where("package.lotId", "=", lotId).orderBy("package.id", "desc").limit(page.limit);
  if (page.cursor !== undefined) query = query.where("package.id", "<", page.cursor);
  return (await query.execute()) as PackageRow[];
}

/** The lot's package with the highest version, whatever became of it; with `except`, the highest in none of those states. */
export async function findHighestPackage(
  db: Db,
  lotId: string,
  options: { except?: readonly PackageState[] } = {},
): Promise<PackageRow | undefined> {
  let query = packagesWithNames(db)
    .where("package.lotId", "=", lotId)
    .orderBy("package.versionMajor", "desc")
    .orderBy("package.versionMinor", "desc")
    .orderBy("package.versionPatch", "desc")
    .limit(1);
  if (options.except) query = query.where("package.state", "not in", [...options.except]);
  return (await query.executeTakeFirst()) as PackageRow | undefined;
}

/** Stores a package that is to be built. @throws `package.changed` where the number is taken, as raised by its constraint */
export async function insertPackage(trx: Trx, row: Insertable<Package>): Promise<void> {
  await trx.insertInto("package").values(row).execute();
}

export interface PackageProgress {
  done: number;
  total: number;
  step: string;
}

/**
 * What a waiting person sees of a build; written outside the build's own transaction.
 * @returns false where the package is no longer building
 */
export async function setPackageProgress(db: Db, id: string, progress: PackageProgress): Promise<boolean> {
  const { done, total, step } = progress;
  const result = await db
    .updateTable("package")
    .set({ progressDone: done, progressTotal: total, progressStep: step })
    .where("id", "=", id)
    .where("state", "=", "building")
    .executeTakeFirst();
  return result.numUpdatedRows > 0n;
}

export interface BuiltPackage {
  state: "draft" | "failed";
  digest: Buffer | null;
  counts: Json;
  failure: Json | null;
  builtAt: Date;
}

/** Ends a build. */
export async function finishPackage(trx: Trx, id: string, built: BuiltPackage): Promise<void> {
  const { counts, failure, ...rest } = built;
  await trx
    .updateTable("package")
    .set({
      ...rest,
      counts: JSON.stringify(counts),
      failure: failure === null ? null : JSON.stringify(failure),
      progressStep: "",
    })
    .where("id", "=", id)
    .execute();
}

export interface PackageMove {
  state: PackageState;
  againstDigest?: Buffer | null;
  reviewDigest?: Buffer | null;
  submittedAt?: Date | null;
  submittedBy?: string | null;
  approvedAt?: Date | null;
}

/** Moves a locked package to another state. The database refuses a move that section 6 does not know. */
export async function movePackage(trx: Trx, id: string, move: PackageMove): Promise<void> {
  await trx
    .updateTable("package")
    .set({ ...move })
    .where("id", "=", id)
    .execute();
}

/** What became of building the same again; null while it runs. */
export async function setRebuild(db: Db, id: string, rebuild: Json | null): Promise<void> {
  await db
    .updateTable("package")
    .set({ rebuild: rebuild === null ? null : JSON.stringify(rebuild) })
    .where("id", "=", id)
    .execute();
}

/** Names the derivations whose sets a package holds. */
export async function insertPackageDerivations(
  trx: Trx,
  packageId: string,
  derivationIds: readonly string[],
): Promise<void> {
  if (derivationIds.length === 0) return;
  await trx
    .insertInto("packageDerivation")
    .values(derivationIds.map((derivationId) => ({ packageId, derivationId })))
    .execute();
}

/** A file of a package beside its images, as it was built. */
export interface PackageFileRow {
  name: string;
  content: Buffer;
  sha256: Buffer;
}

/** A file that is made again from the images: what is known of its bytes. */
export interface ToldFileRow {
  name: string;
  byteCount: number;
  /** CRC-32/ISO-HDLC. */
  crc32: number;
  sha256: Buffer;
}

export async function insertPackageFile(
  trx: Trx,
  packageId: string,
  file: PackageFileRow | ToldFileRow,
): Promise<void> {
  await trx
    .insertInto("packageFile")
    .values({ packageId, ...file })
    .execute();
}

/**
 * A stored file of a package such as `manifest.json`: of a lot of 50,000 devices it has 13 MB, which read at once would hold the
 * event loop for a quarter of a second.
 * @throws AppError `package.not_built`
 */
export async function getPackageFile(db: Db, packageId: string, name: string): Promise<PackageFileRow> {
  const { byteCount, sha256 } = await db
    .selectFrom("packageFile")
    .select(["sha256", sql<number>`length(content)`.as("byteCount")])
    .where("packageId", "=", packageId)
    .where("name", "=", name)
    .where("content", "is not", null)
    .executeTakeFirstOrThrow(notBuilt);
  return { name, content: await readContent(db, { packageId, name, byteCount }), sha256 };
}

/** What is read of a content at a time. */
const CONTENT_BYTES = 512 * 1024;

async function readContent(
  db: Db,
  { packageId, name, byteCount }: { packageId: string; name: string; byteCount: number },
): Promise<Buffer> {
  const content = Buffer.allocUnsafe(byteCount);
  for (let from = 0; from < byteCount; from += CONTENT_BYTES) {
    const { part } = await db
      .selectFrom("packageFile")
      .select(sql<Buffer>`substring(content from ${from + 1} for ${CONTENT_BYTES})`.as("part"))
      .where("packageId", "=", packageId)
      .where("name", "=", name)
      .executeTakeFirstOrThrow();
    content.set(part, from);
  }
  return content;
}

/**
 * What is known of a package's `images.jsonl`; with its bytes where it was built when they were still stored.
 * @throws AppError `package.not_built`
 */
export async function getValuesFile(db: Db, packageId: string): Promise<PackageFileRow | ToldFileRow> {
  const name = "images.jsonl";
  const { byteCount, crc32, sha256 } = await db
    .selectFrom("packageFile")
    .select(["byteCount", "crc32", "sha256"])
    .where("packageId", "=", packageId)
    .where("name", "=", name)
    .executeTakeFirstOrThrow(notBuilt);
  if (byteCount === null || crc32 === null) return getPackageFile(db, packageId, name);
  return { name, byteCount, crc32: Number(crc32), sha256 };
}

const notBuilt = () =>
  new AppError("package.not_built", { message: "The package has no files: it is building or its build failed." });
