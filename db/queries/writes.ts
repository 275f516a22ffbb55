import { type RawBuilder, sql } from "kysely";
import type { Db, Trx } from "@/db/executor";

export type WriteOutcome = "verified" | "mismatch" | "failed" | "interrupted" | "unknown-image" | "unknown-serial";

/** What a station reported about one device, and what the server made of it. Never changed afterwards. */
export interface WriteRow {
  id: string;
  stationId: string;
  /** Rises by one with each record of a station. */
  counter: number;
  serial: string;
  deviceId: string | null;
  packageId: string | null;
  packageReported: string;
  imageSha256: Buffer;
  result: "written" | "failed" | "interrupted";
  readbackSha256: Buffer | null;
  serialBefore: string | null;
  hardwareId: string | null;
  firmware: string | null;
  zeroMvV: number | null;
  deviceTemp: number | null;
  startedAt: Date;
  finishedAt: Date;
  operator: string;
  detail: string | null;
  outcome: WriteOutcome;
  flags: string[];
  contentSha256: Buffer;
  receivedAt: Date;
}

/** Lets the uploads of one station go one after the other, until commit: two at once may hold the same records in another order. */
export async function lockStationUploads(trx: Trx, stationId: string): Promise<void> {
  await sql`select pg_advisory_xact_lock(hashtextextended(${`station-writes ${stationId}`}, 0))`.execute(trx);
}

/** Records among the ids that are there already. */
export function listKnownWrites(
  db: Db,
  ids: readonly string[],
): Promise<{ id: string; stationId: string; contentSha256: Buffer }[]> {
  return db
    .selectFrom("writeRecord")
    .select(["id", "stationId", "contentSha256"])
    .where(sql<boolean>`id = any(${ids as string[]}::uuid[])`)
    .execute();
}

/** Stores records; one that another request stored meanwhile is left alone. @returns ids stored by this call */
export async function insertWrites(trx: Trx, rows: readonly WriteRow[]): Promise<string[]> {
  if (rows.length === 0) return [];
  const stored = await trx
    .insertInto("writeRecord")
    .values(rows.map((row) => ({ ...row })))
    .onConflict((conflict) => conflict.column("id").doNothing())
    .returning("id")
    .execute();
  return stored.map((row) => row.id);
}

export interface WriteTarget {
  deviceId: string;
  serial: string;
  familyId: string;
  hardwareId: string | null;
  held: boolean;
  scrapped: boolean;
}

/**
 * Devices among the serials with what a write is compared with, locked until commit, so that of two stations at once one tells the
 * board. Always in one order, and so that records may still refer to the rows: else two could wait for each other in a ring.
 */
export function lockWriteTargets(trx: Trx, serials: readonly string[]): Promise<WriteTarget[]> {
  return trx
    .selectFrom("device")
    .innerJoin("lot", "lot.id", "device.lotId")
    .select(["device.id as deviceId", "device.serial", "lot.familyId"])
    .select(["device.hardwareId", "device.held", "device.scrapped"])
    .where(sql<boolean>`device.serial = any(${serials as string[]}::text[])`)
    .orderBy("device.id")
    .forNoKeyUpdate("device")
    .execute();
}

export interface WriteImage {
  packageId: string;
  serial: string;
  sha256: Buffer;
  hardwareId: string | null;
  zero: number | null;
  zeroTc: number | null;
  zeroTc2: number | null;
  tempOffset: number | null;
  tempSlope: number | null;
  lotId: string;
  firmware: string;
  familyDocument: unknown;
}

/** Images of the packages for the serials, with the coefficients they hold. */
export function listWriteImages(
  db: Db,
  packageIds: readonly string[],
  serials: readonly string[],
): Promise<WriteImage[]> {
  return db
    .selectFrom("image")
    .innerJoin("package", "package.id", "image.packageId")
    .innerJoin("familyRevision", "familyRevision.id", "package.familyRevisionId")
    .innerJoin("coefficientSet", "coefficientSet.id", "image.coefficientSetId")
    .select([
      "image.packageId",
      "image.serial",
      "image.sha256",
      "image.hardwareId",
      "coefficientSet.zero",
      "coefficientSet.zeroTc",
      "coefficientSet.zeroTc2",
      "coefficientSet.tempOffset",
      "coefficientSet.tempSlope",
      "package.lotId",
      "package.firmware",
      "familyRevision.document as familyDocument",
    ])
    .where(sql<boolean>`image.package_id = any(${packageIds as string[]}::uuid[])`)
    .where(sql<boolean>`image.serial = any(${serials as string[]}::text[])`)
    .execute();
}

/** When each package of the lots was live, oldest first. */
export function listLiveStarts(db: Db, lotIds: readonly string[]) {
  return db
    .selectFrom("livePeriod")
    .select(["lotId", "packageId", "kind", "sequence", "startedAt"])
    .where(sql<boolean>`lot_id = any(${lotIds as string[]}::uuid[])`)
    .orderBy("lotId")
    .orderBy("sequence")
    .execute();
}

/** Remembers the board and firmware of devices whose board was not known before. */
export async function setFirstHardware(
  trx: Trx,
  boards: readonly { deviceId: string; hardwareId: string }[],
): Promise<void> {
  if (boards.length === 0) return;
  await sql`
    update device set hardware_id = given.hardware_id
    from unnest(${boards.map((b) => b.deviceId)}::uuid[], ${boards.map((b) => b.hardwareId)}::text[]) as given (id, hardware_id)
    where device.id = given.id and device.hardware_id is null
  `.execute(trx);
}

const listedColumns = [
  "writeRecord.id",
  "writeRecord.counter",
  "writeRecord.serial",
  "writeRecord.packageId",
  "writeRecord.packageReported",
  "writeRecord.imageSha256",
  "writeRecord.readbackSha256",
  "writeRecord.result",
  "writeRecord.outcome",
  "writeRecord.flags",
  "writeRecord.operator",
  "writeRecord.detail",
  "writeRecord.hardwareId",
  "writeRecord.startedAt",
  "writeRecord.finishedAt",
  "writeRecord.receivedAt",
  "station.name as station",
  "package.version",
] as const;

function selectWrites(db: Db) {
  return db
    .selectFrom("writeRecord")
    .innerJoin("station", "station.id", "writeRecord.stationId")
    .leftJoin("package", "package.id", "writeRecord.packageId")
    .select(listedColumns);
}

export type ListedWrite = Awaited<ReturnType<typeof listWritesOfSerial>>[number];

/** Everything stations reported about a serial, newest first. */
export function listWritesOfSerial(db: Db, serial: string) {
  return selectWrites(db)
    .where("writeRecord.serial", "=", serial)
    .orderBy("writeRecord.finishedAt", "desc")
    .orderBy("writeRecord.counter", "desc")
    .execute();
}

/** What a list of write records is cut down to. */
export interface WriteFilter {
  limit: number;
  /** Id of the last record of the page before. */
  cursor?: string;
  outcome?: string;
  flagged?: boolean;
  /** Part of the serial, any case. */
  q?: string;
}

/** Write records of a lot's devices, newest received first. */
export function listWritesOfLot(db: Db, lotId: string, filter: WriteFilter): Promise<ListedWrite[]> {
  return newestWrites(db, filter)
    .innerJoin("device", "device.id", "writeRecord.deviceId")
    .where("device.lotId", "=", lotId)
    .execute();
}

/** What a station reported, newest received first. */
export function listWritesOfStation(db: Db, stationId: string, filter: WriteFilter): Promise<ListedWrite[]> {
  return newestWrites(db, filter).where("writeRecord.stationId", "=", stationId).execute();
}

function newestWrites(db: Db, { limit, cursor, outcome, flagged, q }: WriteFilter) {
  let query = selectWrites(db).orderBy("writeRecord.receivedAt", "desc").orderBy("writeRecord.id", "desc").limit(limit);
  if (outcome !== undefined) query = query.where("writeRecord.outcome", "=", outcome);
  if (flagged !== undefined) query = query.where(sql<boolean>`(write_record.flags <> '{}') = ${flagged}`);
  if (q !== undefined) query = query.where(sql<boolean>`position(${q.toUpperCase()} in write_record.serial) > 0`);
  if (cursor !== undefined) {
    query = query.where(
      sql<boolean>`(write_record.received_at, write_record.id) < (select received_at, id from write_record where id = ${cursor}::uuid)`,
    );
  }
  return query;
}

export interface CarriedRow {
  serial: string;
  deviceId: string;
  held: boolean;
  scrapped: boolean;
  shipped: boolean;
  writeId: string | null;
  outcome: string | null;
  packageId: string | null;
  version: string | null;
  imageSha256: Buffer | null;
  finishedAt: Date | null;
  station: string | null;
  boardReplacedAt: Date | null;
}

/**
 * The deciding record of a device `d` up to a time: of each station the one with the highest counter that touched the memory
 * (not `failed`), of those the last finished. Found by serial, so that what was reported before the serial was known counts too.
 */
export const decidingWriteBy = (until: RawBuilder<unknown>) => sql`(
  select newest.* from (
    select distinct on (r.station_id) r.* from write_record r
    where r.serial = d.serial and r.outcome <> 'failed' and r.finished_at <= ${until}
    order by r.station_id, r.counter desc, r.finished_at desc, r.received_at desc
  ) newest order by newest.finished_at desc, newest.received_at desc limit 1
)`;

/** The deciding record of a device `d` as of now. */
export const decidingWrite = decidingWriteBy(sql`'infinity'::timestamptz`);

/** What each device of a lot carries by its deciding record. */
export async function listCarried(
  db: Db,
  lotId: string,
  page: { after?: string; limit: number; serial?: string },
): Promise<CarriedRow[]> {
  const after = page.after ?? "";
  const result = await sql<CarriedRow>`
    select d.serial, d.id as device_id, d.held, d.scrapped, d.shipped, w.id as write_id, w.outcome, w.package_id, p.version,
           w.image_sha256, w.finished_at, s.name as station,
           (select max(e.at) from device_event e where e.device_id = d.id and e.kind = 'board-replaced') as board_replaced_at
    from device d
    left join lateral ${decidingWrite} w on true
    left join package p on p.id = w.package_id
    left join station s on s.id = w.station_id
    where d.lot_id = ${lotId}::uuid and d.serial > ${after} and (${page.serial ?? null}::text is null or d.serial = ${page.serial ?? null})
    order by d.serial limit ${page.limit}
  `.execute(db);
  return result.rows;
}
