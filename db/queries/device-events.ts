import type { Db, Trx } from "@/db/executor";
import { AppError } from "@/lib/errors";

export type DeviceEventKind =
  | "hold"
  | "resume"
  | "scrap"
  | "rework"
  | "board-replaced"
  | "firmware"
  | "shipped"
  | "returned";

export interface NewDeviceEvent {
  id: string;
  deviceId: string;
  kind: DeviceEventKind;
  reason: string;
  reference: string | null;
  hardwareId: string | null;
  firmware: string | null;
  personId: string;
  at: Date;
}

/** Records what happened to a device. @throws `device.self_approval`, `device.not_held` as raised by the database */
export async function insertDeviceEvent(trx: Trx, event: NewDeviceEvent): Promise<void> {
  await trx.insertInto("deviceEvent").values(event).execute();
}

/** What happened to a device, newest first. */
export function listDeviceEvents(db: Db, deviceId: string) {
  return db
    .selectFrom("deviceEvent")
    .innerJoin("person", "person.id", "deviceEvent.personId")
    .select([
      "deviceEvent.id",
      "deviceEvent.kind",
      "deviceEvent.reason",
      "deviceEvent.reference",
      "deviceEvent.hardwareId",
      "deviceEvent.firmware",
      "deviceEvent.at",
      "person.name as person",
    ])
    .where("deviceEvent.deviceId", "=", deviceId)
    .orderBy("deviceEvent.at", "desc")
    .orderBy("deviceEvent.id", "desc")
    .execute();
}

/** Who held a device last. */
export async function findHolder(db: Db, deviceId: string): Promise<string | undefined> {
  const row = await db
    .selectFrom("deviceEvent")
    .select("personId")
    .where("deviceId", "=", deviceId)
    .where("kind", "=", "hold")
    .orderBy("at", "desc")
    .orderBy("id", "desc")
    .limit(1)
    .executeTakeFirst();
  return row?.personId;
}

export interface DeviceChange {
  held?: boolean;
  scrapped?: boolean;
  shipped?: boolean;
  hardwareId?: string;
  firmware?: string;
}

/** Brings the device's own row in line with an event. */
export async function updateDevice(trx: Trx, id: string, change: DeviceChange): Promise<void> {
  if (Object.keys(change).length > 0)
    await trx
      .updateTable("device")
      .set({ ...change })
      .where("id", "=", id)
      .execute();
}

/** A device by serial, with its lot and family. @throws AppError `device.not_found` */
export async function getDevice(db: Db, serial: string) {
  return selectDevice(db, serial).executeTakeFirstOrThrow(
    () => new AppError("device.not_found", { serial, message: `No device has the serial ${serial}.` }),
  );
}

/** A device by serial, locked until commit. @throws AppError `device.not_found` */
export async function lockDevice(trx: Trx, serial: string) {
  return selectDevice(trx, serial)
    .forUpdate("device")
    .executeTakeFirstOrThrow(
      () => new AppError("device.not_found", { serial, message: `No device has the serial ${serial}.` }),
    );
}

function selectDevice(db: Db, serial: string) {
  return db
    .selectFrom("device")
    .innerJoin("lot", "lot.id", "device.lotId")
    .innerJoin("family", "family.id", "lot.familyId")
    .select([
      "device.id",
      "device.serial",
      "device.lotId",
      "lot.code as lot",
      "family.code as family",
      "lot.familyId",
      "device.hardwareId",
      "device.firmware",
      "lot.firmware as lotFirmware",
      "device.held",
      "device.scrapped",
      "device.shipped",
      "device.addedAt",
    ])
    .where("device.serial", "=", serial);
}
