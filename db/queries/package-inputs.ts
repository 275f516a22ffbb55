import { sql } from "kysely";
import type { Db } from "@/db/executor";
import { coefficientsOf } from "@/db/queries/coefficients";
import type { Coefficients } from "@/lib/domain/compensation/types";

/** A coefficient set as a package is composed from it. */
export interface SetForImage {
  id: string;
  derivationId: string;
  coefficients: Coefficients | null;
  /** What stands beside the values, as the derivation stored it. */
  detail: unknown;
}

/** Sets by id; ids without a set are left out. `withDetail` reads what stands beside the values too. */
export async function listSetsById(
  db: Db,
  ids: readonly string[],
  { withDetail = false }: { withDetail?: boolean } = {},
): Promise<Map<string, SetForImage>> {
  const rows = await db
    .selectFrom("coefficientSet")
    .select(["id", "derivationId", "tempOffset", "tempSlope", "zero", "zeroTc", "zeroTc2", "gain", "gainTc", "gainTc2"])
    .$if(withDetail, (query) => query.select("detail"))
    .where(sql<boolean>`id = any(${ids as string[]}::uuid[])`)
    .execute();
  return new Map(
    rows.map((row) => [
      row.id,
      { id: row.id, derivationId: row.derivationId, coefficients: coefficientsOf(row), detail: row.detail ?? {} },
    ]),
  );
}

/** A device as the choice of its set sees it. */
export interface DeviceToPack {
  id: string;
  serial: string;
  hardwareId: string | null;
  held: boolean;
  scrapped: boolean;
}

/** Devices of a lot by serial, at most `limit` after a serial. */
export function listDevicesToPack(
  db: Db,
  lotId: string,
  page: { after: string; limit: number },
): Promise<DeviceToPack[]> {
  return db
    .selectFrom("device")
    .select(["id", "serial", "hardwareId", "held", "scrapped"])
    .where("lotId", "=", lotId)
    .where("serial", ">", page.after)
    .orderBy("serial")
    .limit(page.limit)
    .execute();
}

/** A coefficient set as the choice between several sees it. */
export interface SetToChoose {
  deviceId: string;
  setId: string;
  derivationId: string;
  familyRevisionId: string;
  order: 1 | 2;
  state: "proposed" | "approved" | "refused" | "stale" | "revoked";
}

/** The newest set with values of each of some devices, among those in one of the states where they are given; by device. */
export async function listSetsToChoose(
  db: Db,
  deviceIds: readonly string[],
  states?: readonly SetToChoose["state"][],
): Promise<Map<string, SetToChoose>> {
  const { rows } = await sql<SetToChoose>`
    select distinct on (s.device_id) s.device_id, s.id as set_id, s.derivation_id, d.family_revision_id,
      d.fit_order as "order", s.state
    from coefficient_set s join derivation d on d.id = s.derivation_id
    where s.device_id = any(${deviceIds as string[]}::uuid[]) and s.gain is not null
      and (${states === undefined} or s.state = any(${(states ?? []) as string[]}::text[]))
    order by s.device_id, d.created_at desc, d.id desc
  `.execute(db);
  return new Map(rows.map((row) => [row.deviceId, row]));
}

/** Devices of a lot that a derivation left out by name. */
export async function listExcludedDeviceIds(db: Db, lotId: string): Promise<Set<string>> {
  const rows = await db
    .selectFrom("derivationExclusion")
    .innerJoin("derivation", "derivation.id", "derivationExclusion.derivationId")
    .select("derivationExclusion.deviceId")
    .distinct()
    .where("derivation.lotId", "=", lotId)
    .execute();
  return new Set(rows.map((row) => row.deviceId));
}

/** The board that the readings of each derivation name for each device, the latest reading deciding; where they name one. */
export async function listMeasuredBoards(
  db: Db,
  derivationIds: readonly string[],
): Promise<{ derivationId: string; deviceId: string; hardwareId: string }[]> {
  if (derivationIds.length === 0) return [];
  const { rows } = await sql<{ derivationId: string; deviceId: string; hardwareId: string }>`
    select distinct on (used.derivation_id, reading.device_id)
      used.derivation_id, reading.device_id, reading.hardware_id
    from derivation_run used join reading on reading.run_id = used.run_id
    where used.derivation_id = any(${derivationIds as string[]}::uuid[]) and reading.hardware_id is not null
    order by used.derivation_id, reading.device_id, reading.taken_at desc, reading.row_number desc
  `.execute(db);
  return rows;
}

/** States of the sets that a package was built from, where they are no longer approved: serials by state, rising. */
export async function listLapsedSets(db: Db, packageId: string): Promise<{ serial: string; state: string }[]> {
  const rows = await db
    .selectFrom("image")
    .innerJoin("coefficientSet", "coefficientSet.id", "image.coefficientSetId")
    .select(["image.serial", "coefficientSet.state"])
    .where("image.packageId", "=", packageId)
    .where("coefficientSet.state", "!=", "approved")
    .orderBy("image.serial")
    .execute();
  return rows.map((row) => ({ serial: row.serial, state: row.state ?? "" }));
}

/** Those of some sets that are not approved now: serials with the state, rising. */
export async function listSetsNotApproved(
  db: Db,
  setIds: readonly string[],
): Promise<{ serial: string; state: string }[]> {
  const rows = await db
    .selectFrom("coefficientSet")
    .innerJoin("device", "device.id", "coefficientSet.deviceId")
    .select(["device.serial", "coefficientSet.state"])
    .where(sql<boolean>`coefficient_set.id = any(${setIds as string[]}::uuid[])`)
    .where("coefficientSet.state", "is distinct from", "approved")
    .orderBy("device.serial")
    .execute();
  return rows.map((row) => ({ serial: row.serial, state: row.state ?? "" }));
}

/** Firmware that some devices are known to run, where it is another than the lot's: by serial. */
export async function listFirmwareOtherThan(
  db: Db,
  deviceIds: readonly string[],
  firmware: string,
): Promise<{ serial: string; firmware: string }[]> {
  const rows = await db
    .selectFrom("device")
    .select(["serial", "firmware"])
    .where(sql<boolean>`id = any(${deviceIds as string[]}::uuid[])`)
    .where("firmware", "is not", null)
    .where("firmware", "!=", firmware)
    .orderBy("serial")
    .execute();
  return rows.map((row) => ({ serial: row.serial, firmware: row.firmware as string }));
}

/** Firmware that devices of a package are known to run, where it is another than the lot's: by serial. */
export async function listOtherFirmware(
  db: Db,
  packageId: string,
  firmware: string,
): Promise<{ serial: string; firmware: string }[]> {
  const rows = await db
    .selectFrom("image")
    .innerJoin("device", "device.id", "image.deviceId")
    .select(["image.serial", "device.firmware"])
    .where("image.packageId", "=", packageId)
    .where("device.firmware", "is not", null)
    .where("device.firmware", "!=", firmware)
    .orderBy("image.serial")
    .execute();
  return rows.map((row) => ({ serial: row.serial, firmware: row.firmware as string }));
}

/** Derivations whose sets a package holds. */
export async function listPackageDerivationIds(db: Db, packageId: string): Promise<string[]> {
  const rows = await db
    .selectFrom("packageDerivation")
    .select("derivationId")
    .where("packageId", "=", packageId)
    .orderBy("derivationId")
    .execute();
  return rows.map((row) => row.derivationId);
}
