import { sql } from "kysely";
import type { Db } from "@/db/executor";
import { decidingWriteBy } from "@/db/queries/writes";

/** A device of a proof run with what decided its memory when it was first read there. */
export interface ProvenDeviceRow {
  runId: string;
  deviceId: string;
  serial: string;
  /** First reading of the run, so that only what was written before counts. */
  readAt: Date;
  /** Null where no station had written it. */
  outcome: string | null;
  packageId: string | null;
  version: string | null;
  layout: string | null;
  imageSha256: Buffer | null;
  writtenAt: Date | null;
  boardReplacedAt: Date | null;
  /** As the station reported it, else the device's, else the lot's. */
  firmware: string;
}

/**
 * Devices of proof runs with the deciding record of the time they were read: of each station the highest counter that touched
 * the memory and had finished by then, of those the last finished. By run and serial.
 */
export async function listProvenDevices(db: Db, runIds: readonly string[]): Promise<ProvenDeviceRow[]> {
  if (runIds.length === 0) return [];
  const { rows } = await sql<ProvenDeviceRow>`
    select read.run_id, d.id as device_id, d.serial, read.read_at, w.outcome, w.package_id, p.version, l.version as layout,
           w.image_sha256, w.finished_at as written_at,
           (select max(e.at) from device_event e where e.device_id = d.id and e.kind = 'board-replaced' and e.at <= read.read_at)
             as board_replaced_at,
           coalesce(w.firmware, d.firmware, lot.firmware) as firmware
    from (select run_id, device_id, min(taken_at) as read_at from reading where run_id = any(${runIds as string[]}::uuid[])
          group by run_id, device_id) read
    join device d on d.id = read.device_id
    join lot on lot.id = d.lot_id
    left join lateral ${decidingWriteBy(sql`read.read_at`)} w on true
    left join package p on p.id = w.package_id
    left join layout l on l.id = p.layout_id
    order by read.run_id, d.serial
  `.execute(db);
  return rows;
}

const countingProofRuns = (db: Db) =>
  db
    .selectFrom("run")
    .select("run.id")
    .where("run.purpose", "=", "proof")
    .where(({ not, exists, selectFrom }) =>
      not(exists(selectFrom("run as later").select("later.id").whereRef("later.supersedesId", "=", "run.id"))),
    )
    .orderBy("run.id", "desc");

/** Proof runs of a lot that count, newest first. */
export async function listProofRunsOfLot(db: Db, lotId: string): Promise<string[]> {
  const rows = await countingProofRuns(db).where("run.lotId", "=", lotId).execute();
  return rows.map((row) => row.id);
}

/** Proof runs that count and read a device, newest first. */
export async function listProofRunsOfDevice(db: Db, serial: string): Promise<{ id: string; lot: string }[]> {
  return countingProofRuns(db)
    .innerJoin("lot", "lot.id", "run.lotId")
    .select("lot.code as lot")
    .where(({ exists, selectFrom }) =>
      exists(
        selectFrom("reading")
          .innerJoin("device", "device.id", "reading.deviceId")
          .select("reading.runId")
          .whereRef("reading.runId", "=", "run.id")
          .where("device.serial", "=", serial),
      ),
    )
    .execute();
}

/** Lots with something live and a proof run that counts, the newest proof first. */
export async function listLotsToProve(db: Db, limit: number): Promise<string[]> {
  const { rows } = await sql<{ code: string }>`
    select t.code from lot t
    cross join lateral (
      select max(r.id::text) as id from run r where r.lot_id = t.id and r.purpose = 'proof'
        and not exists (select 1 from run later where later.supersedes_id = r.id)) proof
    where proof.id is not null and exists (select 1 from package k where k.lot_id = t.id and k.state = 'live')
    order by proof.id desc limit ${limit}
  `.execute(db);
  return rows.map((row) => row.code);
}
