import { sql } from "kysely";
import { textArray, uuidArray } from "@/db/binary-arrays";
import type { Db, Trx } from "@/db/executor";
import { slicesOf } from "@/db/slices";

const UUID_LENGTH = 36;
/** Devices that a statement asks for, adds or changes: about 10 ms of this process. */
const DEVICES_A_STATEMENT = 2_000;

export interface DeviceRow {
  id: string;
  serial: string;
  lotId: string;
  /** Of the board in it, as last reported. */
  hardwareId: string | null;
  firmware: string | null;
  /** Of the strain gauges, as its maker names it. */
  gaugeBatch: string | null;
  /** Of the body's material. */
  materialBatch: string | null;
  held: boolean;
  scrapped: boolean;
  shipped: boolean;
  addedAt: Date;
}

const deviceColumns = [
  "device.id",
  "device.serial",
  "device.lotId",
  "device.hardwareId",
  "device.firmware",
  "device.gaugeBatch",
  "device.materialBatch",
  "device.held",
  "device.scrapped",
  "device.shipped",
  "device.addedAt",
] as const;

export type ListedDeviceRow = DeviceRow & { coefficients: string | null };

/** A lot's devices by serial, each with the state of its newest coefficient set. */
export async function listDevices(
  db: Db,
  lotId: string,
  { after, limit, q }: { after?: string; limit: number; q?: string },
): Promise<ListedDeviceRow[]> {
  let query = db
    .selectFrom("device")
    .select(deviceColumns)
    .select((eb) =>
      eb
        .selectFrom("coefficientSet")
        .select("coefficientSet.state")
        .whereRef("coefficientSet.deviceId", "=", "device.id")
        .where("coefficientSet.state", "is not", null)
        .orderBy("coefficientSet.createdAt", "desc")
        .limit(1)
        .as("coefficients"),
    )
    .where("device.lotId", "=", lotId)
    .orderBy("device.serial")
    .limit(limit);
  if (after !== undefined) query = query.where("device.serial", ">", after);
  if (q !== undefined) query = query.where(sql<boolean>`position(${q.trim().toUpperCase()} in device.serial) > 0`);
  return query.execute();
}

/** Every device of a lot by serial: what builds and imports match serials with. */
export async function listAllDevices(db: Db, lotId: string): Promise<DeviceRow[]> {
  return db.selectFrom("device").select(deviceColumns).where("lotId", "=", lotId).orderBy("serial").execute();
}

/** Devices of any lot among the serials, in the order of their serials by code units. */
export async function findDevicesBySerial(
  db: Db,
  serials: readonly string[],
): Promise<(DeviceRow & { lotCode: string })[]> {
  const found: (DeviceRow & { lotCode: string })[] = [];
  for (const some of slicesOf([...new Set(serials)].sort(), DEVICES_A_STATEMENT)) {
    const rows = await db
      .selectFrom("device")
      .innerJoin("lot", "lot.id", "device.lotId")
      .select(deviceColumns)
      .select("lot.code as lotCode")
      .where(sql<boolean>`device.serial = any(${textArray(some)}::text[])`)
      .orderBy(sql`device.serial collate "C"`)
      .execute();
    for (const row of rows) found.push(row);
  }
  return found;
}

/** Ids of a lot's devices by serial, of those among some serials. */
export async function findDeviceIds(db: Db, lotId: string, serials: readonly string[]): Promise<Map<string, string>> {
  const ids = new Map<string, string>();
  for (const some of slicesOf(serials, DEVICES_A_STATEMENT)) {
    // In one text: thousands of rows take the driver longer than the look-up takes the server.
    const { rows } = await sql<{ pairs: string | null }>`
      select string_agg(id || ' ' || serial, ',') as pairs from device
      where lot_id = ${lotId} and serial = any(${textArray(some)}::text[])
    `.execute(db);
    for (const pair of rows[0]?.pairs?.split(",") ?? [])
      ids.set(pair.slice(UUID_LENGTH + 1), pair.slice(0, UUID_LENGTH));
  }
  return ids;
}

/** Lots of devices by serial; serials that no lot has are left out. */
export async function findLotsOfSerials(db: Db, serials: readonly string[]): Promise<Map<string, string>> {
  const lots = new Map<string, string>();
  for (const some of slicesOf(serials, DEVICES_A_STATEMENT)) {
    const rows = await db
      .selectFrom("device")
      .innerJoin("lot", "lot.id", "device.lotId")
      .select(["device.serial", "lot.code"])
      .where(sql<boolean>`device.serial = any(${textArray(some)}::text[])`)
      .execute();
    for (const { serial, code } of rows) lots.set(serial, code);
  }
  return lots;
}

/** How many devices a lot has. */
export async function countDevices(db: Db, lotId: string): Promise<number> {
  const row = await db
    .selectFrom("device")
    .select(sql<number>`count(*)::int`.as("count"))
    .where("lotId", "=", lotId)
    .executeTakeFirstOrThrow();
  return row.count;
}

/** What a device is made of; null where nobody said. */
export type Batches = Pick<DeviceRow, "gaugeBatch" | "materialBatch">;

export interface NewDevices {
  lotId: string;
  devices: readonly ({ id: string; serial: string; hardwareId?: string | null } & Partial<Batches>)[];
  addedAt: Date;
  addedBy: string;
}

/** Adds devices to a lot. @throws constraint `device_serial_unique` → `device.in_other_lot`, the transaction is then void */
export async function insertDevices(trx: Trx, { lotId, devices, addedAt, addedBy }: NewDevices): Promise<void> {
  for (const some of slicesOf(devices, DEVICES_A_STATEMENT)) {
    const ids = uuidArray(some.map((device) => device.id));
    const serials = textArray(some.map((device) => device.serial));
    const hardwareIds = textArray(some.map((device) => device.hardwareId));
    const { gauges, materials } = batchArrays(some);
    await sql`
      insert into device (id, serial, lot_id, hardware_id, gauge_batch, material_batch, added_at, added_by)
      select given.id, given.serial, ${lotId}::uuid, given.hardware_id, given.gauge_batch, given.material_batch,
             ${addedAt}::timestamptz, ${addedBy}::uuid
      from unnest(${ids}::uuid[], ${serials}::text[], ${hardwareIds}::text[], ${gauges}::text[], ${materials}::text[])
        as given (id, serial, hardware_id, gauge_batch, material_batch)
    `.execute(trx);
  }
}

function batchArrays(devices: readonly Partial<Batches>[]) {
  return {
    gauges: textArray(devices.map((device) => device.gaugeBatch)),
    materials: textArray(devices.map((device) => device.materialBatch)),
  };
}

export type DeviceBatches = Batches & { id: string };

/**
 * Says what devices are made of, each with both batches as they are from now on.
 * @throws trigger `device.batch_differs` where one changes that no correction names
 */
export async function updateBatches(trx: Trx, devices: readonly DeviceBatches[]): Promise<void> {
  for (const some of slicesOf(devices, DEVICES_A_STATEMENT)) {
    const ids = uuidArray(some.map((device) => device.id));
    const { gauges, materials } = batchArrays(some);
    await sql`
      update device set gauge_batch = given.gauge_batch, material_batch = given.material_batch
      from unnest(${ids}::uuid[], ${gauges}::text[], ${materials}::text[]) as given (id, gauge_batch, material_batch)
      where device.id = given.id
    `.execute(trx);
  }
}

export interface BatchCorrections {
  devices: readonly (DeviceBatches & { correctionId: string })[];
  reason: string;
  personId: string;
  at: Date;
}

/** Notes that batches told before were wrong, and what is right. */
export async function insertBatchCorrections(trx: Trx, corrections: BatchCorrections): Promise<void> {
  const { devices, reason, personId, at } = corrections;
  for (const some of slicesOf(devices, DEVICES_A_STATEMENT)) {
    const ids = uuidArray(some.map((device) => device.correctionId));
    const deviceIds = uuidArray(some.map((device) => device.id));
    const { gauges, materials } = batchArrays(some);
    await sql`
      insert into device_batch_correction (id, device_id, gauge_batch, material_batch, reason, person_id, at)
      select given.id, given.device_id, given.gauge_batch, given.material_batch, ${reason}, ${personId}::uuid, ${at}::timestamptz
      from unnest(${ids}::uuid[], ${deviceIds}::uuid[], ${gauges}::text[], ${materials}::text[])
        as given (id, device_id, gauge_batch, material_batch)
    `.execute(trx);
  }
}

/** Length of the longest serial among a family's devices; 0 where it has none. */
export async function findSerialLengthMax(db: Db, familyId: string): Promise<number> {
  const row = await db
    .selectFrom("device")
    .innerJoin("lot", "lot.id", "device.lotId")
    .select(sql<number | null>`max(length(device.serial))::int`.as("length"))
    .where("lot.familyId", "=", familyId)
    .executeTakeFirst();
  return row?.length ?? 0;
}
