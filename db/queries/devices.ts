import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";

export interface DeviceRow {
  id: string;
  serial: string;
  lotId: string;
  /** Of the board in it, as last reported. */
  hardwareId: string | null;
  firmware: string | null;
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

/** Devices of any lot among the serials, in the order of their serials. */
export async function findDevicesBySerial(
  db: Db,
  serials: readonly string[],
): Promise<(DeviceRow & { lotCode: string })[]> {
  if (serials.length === 0) return [];
  return db
    .selectFrom("device")
    .innerJoin("lot", "lot.id", "device.lotId")
    .select(deviceColumns)
    .select("lot.code as lotCode")
    .where(sql<boolean>`device.serial = any(${serials as string[]}::text[])`)
    .orderBy("device.serial")
    .execute();
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

export interface NewDevices {
  lotId: string;
  devices: readonly { id: string; serial: string; hardwareId?: string | null }[];
  addedAt: Date;
  addedBy: string;
}

/** Adds devices to a lot in one statement. @throws constraint `device_serial_unique` → `device.in_other_lot`, nothing is then added */
export async function insertDevices(trx: Trx, { lotId, devices, addedAt, addedBy }: NewDevices): Promise<void> {
  if (devices.length === 0) return;
  const ids = devices.map((device) => device.id);
  const serials = devices.map((device) => device.serial);
  const hardwareIds = devices.map((device) => device.hardwareId ?? null);
  await sql`
    insert into device (id, serial, lot_id, hardware_id, added_at, added_by)
    select given.id, given.serial, ${lotId}::uuid, given.hardware_id, ${addedAt}::timestamptz, ${addedBy}::uuid
    from unnest(${ids}::uuid[], ${serials}::text[], ${hardwareIds}::text[]) as given (id, serial, hardware_id)
  `.execute(trx);
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
