import { sql } from "kysely";
import { float8Array, int4Array, textArray, timestamptzArray, uuidArray } from "@/db/binary-arrays";
import type { Db, Trx } from "@/db/executor";
import { slicesOf } from "@/db/slices";
import type { Reading } from "@/lib/domain/compensation/types";

/** Rows a statement takes: about 10 ms of this process, and the next are written while the server stores these. */
const ROWS_A_STATEMENT = 4_000;

/**
 * Stores a run's readings, column by column through `unnest`.
 * @param deviceIds the device of every serial that occurs.
 */
export async function insertReadings(
  trx: Trx,
  runId: string,
  readings: readonly Reading[],
  deviceIds: ReadonlyMap<string, string>,
): Promise<void> {
  let running: Promise<unknown> = Promise.resolve();
  for (const some of slicesOf(readings, ROWS_A_STATEMENT)) {
    const statement = insertStatement(runId, some, deviceIds);
    await running;
    running = statement.execute(trx);
    // Lets the statement leave before anything else takes this thread.
    await new Promise(setImmediate);
  }
  await running;
}

function insertStatement(runId: string, rows: readonly Reading[], deviceIds: ReadonlyMap<string, string>) {
  const numbers = (of: (row: Reading) => number | null | undefined) => float8Array(valuesOf(rows, of));
  const texts = (of: (row: Reading) => string | null | undefined) => textArray(valuesOf(rows, of));
  // Unnested side by side in the list of columns, the rows go straight into the table; in FROM they would be put aside first.
  return sql`
    insert into reading (run_id, row_number, device_id, point, chamber_c, soak_min, device_temp, load_kg, signal_mv_v,
      taken_at, position, hardware_id, dwell_s, output_mv_v)
    select ${runId}::uuid,
      unnest(${int4Array(rows.map((row) => row.row))}::int[]),
      unnest(${uuidArray(rows.map((row) => deviceIds.get(row.serial) as string))}::uuid[]),
      unnest(${int4Array(rows.map((row) => row.point))}::int[]),
      unnest(${numbers((row) => row.chamberC)}::float8[]),
      unnest(${numbers((row) => row.soakMin)}::float8[]),
      unnest(${numbers((row) => row.deviceTemp)}::float8[]),
      unnest(${numbers((row) => row.loadKg)}::float8[]),
      unnest(${numbers((row) => row.signalMvV)}::float8[]),
      unnest(${timestamptzArray(rows.map((row) => row.takenAt))}::timestamptz[]),
      unnest(${texts((row) => row.position)}::text[]),
      unnest(${texts((row) => row.hardwareId)}::text[]),
      unnest(${numbers((row) => row.dwellS)}::float8[]),
      unnest(${numbers((row) => row.outputMvV)}::float8[])
  `;
}

/** A column's values; none where no row has one, which `unnest` fills up with NULL. */
function valuesOf<T>(rows: readonly Reading[], of: (row: Reading) => T | null | undefined): (T | null | undefined)[] {
  const values = rows.map(of);
  return values.some((value) => value !== null && value !== undefined) ? values : [];
}

export type StoredReading = Reading & { runId: string };

function selectReadings(db: Db) {
  return db
    .selectFrom("reading")
    .innerJoin("device", "device.id", "reading.deviceId")
    .select([
      "reading.runId",
      "reading.rowNumber as row",
      "device.serial",
      "reading.point",
      "reading.chamberC",
      "reading.soakMin",
      "reading.deviceTemp",
      "reading.loadKg",
      "reading.signalMvV",
      "reading.takenAt",
      "reading.position",
      "reading.hardwareId",
      "reading.dwellS",
      "reading.outputMvV",
    ]);
}

const readingOf = <R extends { takenAt: Date }>(row: R) => ({ ...row, takenAt: row.takenAt.toISOString() });

/** All readings of some runs, by run and row of the file. */
export async function listReadings(db: Db, runIds: readonly string[]): Promise<StoredReading[]> {
  if (runIds.length === 0) return [];
  const rows = await selectReadings(db)
    .where("reading.runId", "in", [...runIds])
    .orderBy("reading.runId")
    .orderBy("reading.rowNumber")
    .execute();
  return rows.map(readingOf);
}

/** One page of a run's readings by row of the file, of one device where a serial is given. */
export async function listReadingsPage(
  db: Db,
  runId: string,
  page: { afterRow: number; limit: number; serial?: string },
): Promise<StoredReading[]> {
  let query = selectReadings(db)
    .where("reading.runId", "=", runId)
    .where("reading.rowNumber", ">", page.afterRow)
    .orderBy("reading.rowNumber")
    .limit(page.limit);
  if (page.serial !== undefined) query = query.where("device.serial", "=", page.serial);
  const rows = await query.execute();
  return rows.map(readingOf);
}

/** Serials that stand in more than one of the runs under one purpose, by purpose and serial; the first few. */
export async function listRepeatedSerials(
  db: Db,
  runIds: readonly string[],
  limit: number,
): Promise<{ purpose: string; serial: string; runs: string[] }[]> {
  if (runIds.length < 2) return [];
  const { rows } = await sql<{ purpose: string; serial: string; runs: string[] }>`
    select run.purpose, device.serial, array_agg(used.run_id::text order by used.run_id) as runs
    from (select distinct run_id, device_id from reading where run_id = any(${runIds as string[]}::uuid[])) used
    join run on run.id = used.run_id join device on device.id = used.device_id
    group by run.purpose, device.serial having count(*) > 1
    order by run.purpose, device.serial limit ${limit}
  `.execute(db);
  return rows;
}
