import { createHash } from "node:crypto";
import { byCodeUnits } from "@/builders/bundle/manifest";
import type { Db } from "@/db/executor";
import {
  type DeviceToPack,
  listDevicesToPack,
  listExcludedDeviceIds,
  listMeasuredBoards,
  listSetsToChoose,
  type SetToChoose,
} from "@/db/queries/package-inputs";
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
  /** Derivations whose sets are packed, rising. */
  derivationIds: string[];
}

/** Devices looked at at a time: how long the event loop is held. */
const PAGE_DEVICES = 2_000;

const DECIDED = ["approved", "stale", "revoked"] as const;

/** What a lot's package would take now, and what it would leave out. */
export async function chooseSets(db: Db, lotId: string, needs: PackageRequirements): Promise<Selection> {
  const excludedIds = await listExcludedDeviceIds(db, lotId);
  const selection: Selection = {
    lotDevices: 0,
    packed: [],
    leftOut: [],
    newerUndecided: [],
    otherBoard: [],
    derivationIds: [],
  };
  const taken: Taken[] = [];
  for (let after = "", more = true; more; ) {
    const devices = await listDevicesToPack(db, lotId, { after, limit: PAGE_DEVICES });
    const ids = devices.map((device) => device.id);
    const newest = await listSetsToChoose(db, ids);
    const decided = await listSetsToChoose(db, ids, DECIDED);
    for (const device of devices) {
      const { serial } = device;
      const excluded = excludedIds.has(device.id);
      const choice = chooseSet({ ...device, excluded }, newest.get(device.id), decided.get(device.id), needs);
      if ("leftOut" in choice) selection.leftOut.push({ serial, reason: choice.leftOut });
      else taken.push({ device, set: choice.set });
      if ("set" in choice && choice.newerUndecided) selection.newerUndecided.push(serial);
    }
    selection.lotDevices += devices.length;
    after = devices.at(-1)?.serial ?? after;
    more = devices.length === PAGE_DEVICES;
  }
  await addPacked(db, selection, taken);
  return selection;
}

interface Taken {
  device: DeviceToPack;
  set: SetToChoose;
}

/** Packs what was taken, each with the board that its coefficients were found on. */
async function addPacked(db: Db, selection: Selection, taken: readonly Taken[]): Promise<void> {
  selection.derivationIds = [...new Set(taken.map(({ set }) => set.derivationId))].sort(byCodeUnits);
  const rows = await listMeasuredBoards(db, selection.derivationIds);
  const boards = new Map(rows.map((row) => [`${row.derivationId} ${row.deviceId}`, row.hardwareId]));
  for (const { device, set } of taken) {
    const { id: deviceId, serial } = device;
    const measured = boards.get(`${set.derivationId} ${deviceId}`) ?? null;
    selection.packed.push({ deviceId, serial, coefficientSetId: set.setId, hardwareId: measured ?? device.hardwareId });
    if (measured !== null && device.hardwareId !== null && device.hardwareId !== measured)
      selection.otherBoard.push(serial);
  }
  // The database orders by its own rules; bundles go by code units.
  selection.packed.sort((a, b) => byCodeUnits(a.serial, b.serial));
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
