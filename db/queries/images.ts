import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import { AppError } from "@/lib/errors";

export interface NewImage {
  deviceId: string;
  serial: string;
  coefficientSetId: string;
  hardwareId: string | null;
  bytes: Buffer;
  sha256: Buffer;
  hexSha256: Buffer;
}

export interface ImageRow extends NewImage {
  packageId: string;
}

const imageColumns = [
  "packageId",
  "deviceId",
  "serial",
  "coefficientSetId",
  "hardwareId",
  "bytes",
  "sha256",
  "hexSha256",
] as const;

const CHUNK_ROWS = 1_000;

/** Stores the images of a package that is building. */
export async function insertImages(trx: Trx, packageId: string, images: readonly NewImage[]): Promise<void> {
  for (let at = 0; at < images.length; at += CHUNK_ROWS) {
    const part = images.slice(at, at + CHUNK_ROWS);
    const column = <K extends keyof NewImage>(name: K) => part.map((image) => image[name]);
    await sql`
      insert into image (package_id, device_id, serial, coefficient_set_id, hardware_id, bytes, sha256, hex_sha256)
      select ${packageId}::uuid, u.* from unnest(
        ${column("deviceId")}::uuid[], ${column("serial")}::text[], ${column("coefficientSetId")}::uuid[],
        ${column("hardwareId")}::text[], ${column("bytes")}::bytea[], ${column("sha256")}::bytea[],
        ${column("hexSha256")}::bytea[]) as u
    `.execute(trx);
  }
}

/** One device's image in a package. */
export function findImage(db: Db, packageId: string, serial: string): Promise<ImageRow | undefined> {
  return db
    .selectFrom("image")
    .select(imageColumns)
    .where("packageId", "=", packageId)
    .where("serial", "=", serial)
    .executeTakeFirst();
}

/** One device's image in a package. @throws AppError `image.not_found` {serial} */
export async function getImage(db: Db, packageId: string, serial: string): Promise<ImageRow> {
  const image = await findImage(db, packageId, serial);
  if (image) return image;
  throw new AppError("image.not_found", { serial, message: `The package holds no image of ${serial}.` });
}

/** Images of a package by serial, at most `limit`, after the serial `cursor`; `search` keeps serials that contain it. */
export function listImages(
  db: Db,
  packageId: string,
  page: { limit: number; cursor?: string; search?: string },
): Promise<ImageRow[]> {
  let query = db
    .selectFrom("image")
    .select(imageColumns)
    .where("packageId", "=", packageId)
    .orderBy("serial")
    .limit(page.limit);
  if (page.cursor !== undefined) query = query.where("serial", ">", page.cursor);
  if (page.search !== undefined && page.search !== "") {
    query = query.where(sql<boolean>`position(${page.search.toUpperCase()} in serial) > 0`);
  }
  return query.execute();
}

/** Every image of a package by serial, some at a time, so that no package is held in memory whole. */
export async function* eachImages(db: Db, packageId: string, size = CHUNK_ROWS): AsyncGenerator<ImageRow[]> {
  let cursor: string | undefined;
  for (;;) {
    const rows = await listImages(db, packageId, { limit: size, cursor });
    if (rows.length > 0) yield rows;
    if (rows.length < size) return;
    cursor = rows.at(-1)?.serial;
  }
}

/** What comparing needs of an image. */
export type ImageBytesRow = Pick<ImageRow, "serial" | "bytes">;

/** Serial and bytes of every image of a package by serial, after one where it is given, some at a time. */
export async function* eachImageBytes(
  db: Db,
  packageId: string,
  { after, size = 4 * CHUNK_ROWS }: { after?: string; size?: number } = {},
): AsyncGenerator<ImageBytesRow[]> {
  let cursor = after;
  for (;;) {
    let query = db.selectFrom("image").select(["serial", "bytes"]).where("packageId", "=", packageId);
    if (cursor !== undefined) query = query.where("serial", ">", cursor);
    const rows = await query.orderBy("serial").limit(size).execute();
    if (rows.length > 0) yield rows;
    if (rows.length < size) return;
    cursor = rows.at(-1)?.serial;
  }
}

/** Serials of a package's images, rising. */
export async function listSerials(db: Db, packageId: string): Promise<string[]> {
  const rows = await db
    .selectFrom("image")
    .select("serial")
    .where("packageId", "=", packageId)
    .orderBy("serial")
    .execute();
  return rows.map((row) => row.serial);
}

/** Images of some serials in a package, by serial. */
export async function listImagesOfSerials(
  db: Db,
  packageId: string,
  serials: readonly string[],
): Promise<Map<string, ImageRow>> {
  const rows = await db
    .selectFrom("image")
    .select(imageColumns)
    .where("packageId", "=", packageId)
    .where(sql<boolean>`serial = any(${serials as string[]}::text[])`)
    .execute();
  return new Map(rows.map((row) => [row.serial, row]));
}

/** Bytes of the images of some serials in a package, by serial. */
export async function listImageBytes(
  db: Db,
  packageId: string,
  serials: readonly string[],
): Promise<Map<string, Buffer>> {
  const rows = await db
    .selectFrom("image")
    .select(["serial", "bytes"])
    .where("packageId", "=", packageId)
    .where(sql<boolean>`serial = any(${serials as string[]}::text[])`)
    .execute();
  return new Map(rows.map((row) => [row.serial, row.bytes]));
}

/** Derivation of each of some coefficient sets, by the set's id. */
export async function listDerivationsOfSets(db: Db, setIds: readonly string[]): Promise<Map<string, string>> {
  const rows = await db
    .selectFrom("coefficientSet")
    .select(["id", "derivationId"])
    .where(sql<boolean>`id = any(${setIds as string[]}::uuid[])`)
    .execute();
  return new Map(rows.map((row) => [row.id, row.derivationId]));
}

/** How many images a package has. */
export async function countImages(db: Db, packageId: string): Promise<number> {
  const row = await db
    .selectFrom("image")
    .select((eb) => eb.fn.countAll<string>().as("count"))
    .where("packageId", "=", packageId)
    .executeTakeFirstOrThrow();
  return Number(row.count);
}

const imagesWithPackage = (db: Db) =>
  db
    .selectFrom("image")
    .innerJoin("package", "package.id", "image.packageId")
    .select(imageColumns.map((name) => `image.${name}` as const))
    .select(["package.version", "package.state"])
    .orderBy("image.packageId", "desc");

/** An image with the version and state of its package. */
export type ImageOfPackage = ImageRow & { version: string; state: string };

/** Where these very bytes stand: images with the SHA-256, of any package, newest package first. */
export function findImagesBySha256(db: Db, imageSha256: Buffer): Promise<ImageOfPackage[]> {
  return imagesWithPackage(db).where("image.sha256", "=", imageSha256).execute();
}

/** Images of one device in all packages, newest package first. */
export function listImagesOfDevice(db: Db, deviceId: string): Promise<ImageOfPackage[]> {
  return imagesWithPackage(db).where("image.deviceId", "=", deviceId).execute();
}

/** Serials of a package whose device is held now, rising. */
export async function listHeldSerials(db: Db, packageId: string): Promise<string[]> {
  const rows = await db
    .selectFrom("image")
    .innerJoin("device", "device.id", "image.deviceId")
    .select("image.serial")
    .where("image.packageId", "=", packageId)
    .where("device.held", "=", true)
    .orderBy("image.serial")
    .execute();
  return rows.map((row) => row.serial);
}
