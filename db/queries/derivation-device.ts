import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** One reading of a device in a run that a derivation used. */
export interface DeviceReadingRow {
  runId: string;
  purpose: string;
  row: number;
  point: number;
  chamberC: number;
  soakMin: number;
  deviceTemp: number;
  loadKg: number;
  signalMvV: number;
  takenAt: Date;
  position: string | null;
  dwellS: number | null;
}

/** Readings of one device in the runs of a derivation, by run and row of the file. */
export async function listReadingsOfSet(db: Db, derivationId: string, serial: string): Promise<DeviceReadingRow[]> {
  return db
    .selectFrom("derivationRun")
    .innerJoin("run", "run.id", "derivationRun.runId")
    .innerJoin("reading", "reading.runId", "run.id")
    .innerJoin("device", "device.id", "reading.deviceId")
    .select([
      "run.id as runId",
      "run.purpose",
      "reading.rowNumber as row",
      "reading.point",
      "reading.chamberC",
      "reading.soakMin",
      "reading.deviceTemp",
      "reading.loadKg",
      "reading.signalMvV",
      "reading.takenAt",
      "reading.position",
      "reading.dwellS",
    ])
    .where("derivationRun.derivationId", "=", derivationId)
    .where("device.serial", "=", serial)
    .orderBy("run.id")
    .orderBy("reading.rowNumber")
    .execute();
}

/** The serials before and after one in a derivation; null at its ends. */
export async function findNeighbours(
  db: Db,
  derivationId: string,
  serial: string,
): Promise<{ previous: string | null; next: string | null }> {
  const { rows } = await sql<{ previous: string | null; next: string | null }>`
    select (select max(d.serial) from coefficient_set c join device d on d.id = c.device_id
            where c.derivation_id = ${derivationId}::uuid and d.serial < ${serial}) as previous,
           (select min(d.serial) from coefficient_set c join device d on d.id = c.device_id
            where c.derivation_id = ${derivationId}::uuid and d.serial > ${serial}) as next
  `.execute(db);
  return rows[0] ?? { previous: null, next: null };
}
