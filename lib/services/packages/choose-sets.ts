import { createHash } from "node:crypto";
import { byCodeUnits } from "@/builders/bundle/manifest";
import type { Db } from "@/db/executor";
import { listNewestSets, type NewestSetRow } from "@/db/queries/coefficients";
import { type DeviceRow, listAllDevices } from "@/db/queries/devices";
import { listExcludedDeviceIds, listMeasuredBoards } from "@/db/queries/package-inputs";
import { chooseSet, type LeftOutReason, type PackageRequirements } from "@/lib/domain/package-selection";

/** One device of a package and the set that it carries: everything that a build repeats from. */
export interface PackedDevice {
  deviceId: string;
  serial: string;
  coefficientSetId: string;
  /** Board that the coefficients were found on where the readings name it, else the one that the device is known to have. */
  hardwareId: string | null;
}

export interface Selection {
  lotDevices: number;
  /** By serial, in UTF-16 code units. */
  packed: PackedDevice[];
  leftOut: { serial: string; reason: LeftOutReason }[];
  /** Serials packed while a newer set waits for a decision. */
  newerUndecided: string[];
  /** Serials packed although another board is reported in the device than the one that was measured. */
  otherBoard: string[];
}

/** What a lot's package would take now, and what it would leave out. */
export async function chooseSets(db: Db, lotId: string, needs: PackageRequirements): Promise<Selection> {
  const devices = await listAllDevices(db, lotId);
  const newest = bySerial(await listNewestSets(db, lotId));
  const decided = bySerial(await listNewestSets(db, lotId, { states: ["approved", "stale", "revoked"] }));
  const excludedIds = await listExcludedDeviceIds(db, lotId);
  const selection: Selection = {
    lotDevices: devices.length,
    packed: [],
    leftOut: [],
    newerUndecided: [],
    otherBoard: [],
  };
  const taken: { device: DeviceRow; set: NewestSetRow }[] = [];
  for (const device of devices.sort((a, b) => byCodeUnits(a.serial, b.serial))) {
    const { serial } = device;
    const excluded = excludedIds.has(device.id);
    const choice = chooseSet({ ...device, excluded }, newest.get(serial), decided.get(serial), needs);
    if ("leftOut" in choice) selection.leftOut.push({ serial, reason: choice.leftOut });
    else {
      taken.push({ device, set: choice.set });
      if (choice.newerUndecided) selection.newerUndecided.push(serial);
    }
  }
  const boards = await measuredBoards(
    db,
    taken.map(({ set }) => set),
  );
  for (const { device, set } of taken) {
    const { id: deviceId, serial } = device;
    const measured = boards.get(`${set.derivationId} ${deviceId}`) ?? null;
    selection.packed.push({ deviceId, serial, coefficientSetId: set.setId, hardwareId: measured ?? device.hardwareId });
    if (measured !== null && device.hardwareId !== null && device.hardwareId !== measured)
      selection.otherBoard.push(serial);
  }
  return selection;
}

function bySerial(sets: readonly NewestSetRow[]): Map<string, NewestSetRow> {
  return new Map(sets.map((set) => [set.serial, set]));
}

async function measuredBoards(db: Db, sets: readonly NewestSetRow[]): Promise<Map<string, string>> {
  const rows = await listMeasuredBoards(db, [...new Set(sets.map((set) => set.derivationId))]);
  return new Map(rows.map((row) => [`${row.derivationId} ${row.deviceId}`, row.hardwareId]));
}

/** One value for a package's list of devices, so that two lists are compared without being read. */
export function serialsSha256(packed: readonly { serial: string }[]): string {
  const hash = createHash("sha256");
  for (const serial of packed.map((one) => one.serial).sort(byCodeUnits)) hash.update(`${serial}\n`);
  return hash.digest("hex");
}

/** One value for which set each device carries. */
export function setsSha256(packed: readonly PackedDevice[]): string {
  const hash = createHash("sha256");
  for (const one of packed) hash.update(`${one.serial} ${one.coefficientSetId} ${one.hardwareId ?? ""}\n`);
  return hash.digest("hex");
}
