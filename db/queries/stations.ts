import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import { AppError } from "@/lib/errors";

export interface StationRow {
  id: string;
  name: string;
  active: boolean;
  createdAt: Date;
  lastSeenAt: Date | null;
  /** Codes of the families it may write. */
  families: string[];
}

function selectStations(db: Db) {
  return db
    .selectFrom("station")
    .select(["station.id", "station.name", "station.active", "station.createdAt", "station.lastSeenAt"])
    .select((eb) =>
      eb
        .selectFrom("stationFamily")
        .innerJoin("family", "family.id", "stationFamily.familyId")
        .whereRef("stationFamily.stationId", "=", "station.id")
        .select(sql<string[]>`coalesce(array_agg(family.code order by family.code), '{}')`.as("codes"))
        .as("families"),
    );
}

const withFamilies = <T extends { families: string[] | null }>(row: T) => ({ ...row, families: row.families ?? [] });

/** Stations by name. */
export async function listStations(db: Db, page: { limit: number; cursor?: string }): Promise<StationRow[]> {
  let query = selectStations(db).orderBy("station.name").limit(page.limit);
  if (page.cursor !== undefined) query = query.where("station.name", ">", page.cursor);
  return (await query.execute()).map(withFamilies);
}

/** A station. @throws AppError `station.not_found` */
export async function getStation(db: Db, id: string): Promise<StationRow> {
  const row = await selectStations(db)
    .where("station.id", "=", id)
    .executeTakeFirstOrThrow(() => new AppError("station.not_found", { id, message: "There is no such station." }));
  return withFamilies(row);
}

export interface NewStation {
  id: string;
  name: string;
  createdAt: Date;
  createdBy: string;
}

/** Adds a station with the families it may write. @throws constraint `station_name_unique` → `station.exists` */
export async function insertStation(trx: Trx, station: NewStation, familyIds: readonly string[]): Promise<void> {
  await trx.insertInto("station").values(station).execute();
  await insertStationFamilies(trx, station.id, familyIds);
}

async function insertStationFamilies(trx: Trx, stationId: string, familyIds: readonly string[]): Promise<void> {
  if (familyIds.length === 0) return;
  await trx
    .insertInto("stationFamily")
    .values(familyIds.map((familyId) => ({ stationId, familyId })))
    .execute();
}

/** Locks a station until commit. @throws AppError `station.not_found` */
export async function lockStation(trx: Trx, id: string): Promise<void> {
  await trx
    .selectFrom("station")
    .select("id")
    .where("id", "=", id)
    .forUpdate()
    .executeTakeFirstOrThrow(() => new AppError("station.not_found", { id, message: "There is no such station." }));
}

/** Renames, stops or reopens a locked station. @throws constraint `station_name_unique` → `station.exists` */
export async function updateStation(trx: Trx, id: string, change: { name?: string; active?: boolean }): Promise<void> {
  if (Object.keys(change).length > 0)
    await trx
      .updateTable("station")
      .set({ ...change })
      .where("id", "=", id)
      .execute();
}

/** Replaces the families that a locked station may write. */
export async function replaceStationFamilies(trx: Trx, id: string, familyIds: readonly string[]): Promise<void> {
  await trx.deleteFrom("stationFamily").where("stationId", "=", id).execute();
  await insertStationFamilies(trx, id, familyIds);
}

export interface StationKeyRow {
  id: string;
  stationId: string;
  prefix: string;
  createdAt: Date;
  lastUsedAt: Date | null;
  revokedAt: Date | null;
}

/** Keys of the stations, newest first; the key itself is stored nowhere. */
export async function listStationKeys(db: Db, stationIds: readonly string[]): Promise<StationKeyRow[]> {
  if (stationIds.length === 0) return [];
  return db
    .selectFrom("stationKey")
    .select(["id", "stationId", "prefix", "createdAt", "lastUsedAt", "revokedAt"])
    .where("stationId", "in", [...stationIds])
    .orderBy("id", "desc")
    .execute();
}

export interface NewStationKey {
  id: string;
  stationId: string;
  keyHash: Buffer;
  prefix: string;
  createdAt: Date;
  createdBy: string;
}

/** Stores the hash of a new key. */
export async function insertStationKey(trx: Trx, key: NewStationKey): Promise<void> {
  await trx.insertInto("stationKey").values(key).execute();
}

/** Revokes a key that is still good. @returns whether there was one */
export async function revokeStationKey(
  trx: Trx,
  key: { id: string; stationId: string; revokedAt: Date; revokedBy: string },
): Promise<boolean> {
  const result = await trx
    .updateTable("stationKey")
    .set({ revokedAt: key.revokedAt, revokedBy: key.revokedBy })
    .where("id", "=", key.id)
    .where("stationId", "=", key.stationId)
    .where("revokedAt", "is", null)
    .executeTakeFirst();
  return result.numUpdatedRows === 1n;
}

export interface StationLotRow {
  lotId: string;
  lot: string;
  family: string;
  sequence: number;
  packageId: string | null;
  version: string | null;
  digest: Buffer | null;
  devices: number;
  held: string[];
}

/** Lots of the families that have ever had something live, with what is live now. */
export function listStationLots(db: Db, familyIds: readonly string[]): Promise<StationLotRow[]> {
  return db
    .selectFrom("lot")
    .innerJoin("family", "family.id", "lot.familyId")
    .leftJoin("package", (join) => join.onRef("package.lotId", "=", "lot.id").on("package.state", "=", "live"))
    .select([
      "lot.id as lotId",
      "lot.code as lot",
      "family.code as family",
      "lot.sequence",
      "package.id as packageId",
      "package.version",
      "package.digest",
    ])
    .select([
      sql<number>`(select count(*)::int from image where image.package_id = package.id)`.as("devices"),
      sql<string[]>`(
        select coalesce(array_agg(device.serial order by device.serial), '{}')
        from device where device.lot_id = lot.id and device.held
      )`.as("held"),
    ])
    .where("lot.sequence", ">", 0)
    .where(sql<boolean>`lot.family_id = any(${familyIds as string[]}::uuid[])`)
    .orderBy("lot.code")
    .execute();
}
