import type { Db, Trx } from "@/db/executor";
import type { Json } from "@/db/generated/types.generated";
import type { ChamberPositionRow } from "@/db/queries/equipment";
import type { Finding, Purpose } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";

export interface RunRow {
  id: string;
  lotId: string;
  lotCode: string;
  purpose: Purpose;
  /** Of the bytes as uploaded. */
  sha256: Buffer;
  /** Of the file that the bytes were made from, null where they are it. */
  sourceSha256: Buffer | null;
  byteCount: number;
  rowCount: number;
  deviceCount: number;
  fileName: string | null;
  temperatureLowC: number | null;
  temperatureHighC: number | null;
  supersedesId: string | null;
  /** Id of the run that replaces this one, null while it counts. */
  supersededById: string | null;
  reason: string | null;
  /** Planned run that it is the reading of. */
  planId: string | null;
  planName: string | null;
  createdAt: Date;
  createdBy: string;
  createdByName: string;
}

function selectRun(db: Db) {
  return db
    .selectFrom("run")
    .innerJoin("lot", "lot.id", "run.lotId")
    .innerJoin("person", "person.id", "run.createdBy")
    .leftJoin("run as later", "later.supersedesId", "run.id")
    .leftJoin("runPlan", "runPlan.id", "run.planId")
    .select([
      "run.id",
      "run.lotId",
      "lot.code as lotCode",
      "run.purpose",
      "run.sha256",
      "run.sourceSha256",
      "run.byteCount",
      "run.rowCount",
      "run.deviceCount",
      "run.fileName",
      "run.temperatureLowC",
      "run.temperatureHighC",
      "run.supersedesId",
      "later.id as supersededById",
      "run.reason",
      "run.planId",
      "runPlan.name as planName",
      "run.createdAt",
      "run.createdBy",
      "person.name as createdByName",
    ])
    .$narrowType<{ purpose: Purpose }>();
}

const notFound = (id: string) => new AppError("run.not_found", { run: id, message: `There is no run ${id}.` });

/** A run. @throws AppError `run.not_found` */
export async function getRun(db: Db, id: string): Promise<RunRow> {
  return selectRun(db)
    .where("run.id", "=", id)
    .executeTakeFirstOrThrow(() => notFound(id));
}

/** The run of a lot with exactly these bytes, undefined where there is none. */
export async function findRunBySha256(db: Db, lotId: string, sha256: Buffer): Promise<RunRow | undefined> {
  return selectRun(db).where("run.lotId", "=", lotId).where("run.sha256", "=", sha256).executeTakeFirst();
}

/** A lot's runs, newest first; all of them unless a page is asked for. */
export async function listRunsOfLot(
  db: Db,
  lotId: string,
  page: { before?: string; limit?: number } = {},
): Promise<RunRow[]> {
  let query = selectRun(db).where("run.lotId", "=", lotId).orderBy("run.id", "desc");
  if (page.before !== undefined) query = query.where("run.id", "<", page.before);
  if (page.limit !== undefined) query = query.limit(page.limit);
  return query.execute();
}

/** Runs by id, oldest first; ids without a run are left out. */
export async function listRunsById(db: Db, ids: readonly string[]): Promise<RunRow[]> {
  if (ids.length === 0) return [];
  return selectRun(db)
    .where("run.id", "in", [...ids])
    .orderBy("run.id")
    .execute();
}

export interface NewRun {
  id: string;
  lotId: string;
  purpose: Purpose;
  sha256: Buffer;
  sourceSha256: Buffer | null;
  byteCount: number;
  rowCount: number;
  deviceCount: number;
  fileName: string | null;
  temperatureLowC: number | null;
  temperatureHighC: number | null;
  supersedesId: string | null;
  planId: string | null;
  reason: string | null;
  createdAt: Date;
  createdBy: string;
}

/**
 * Adds a run with the bytes as uploaded.
 * @throws constraints `run_bytes_once` → `run.duplicate`, `run_supersedes_once` → `run.already_superseded`
 */
export async function insertRun(trx: Trx, run: NewRun, content: Buffer): Promise<void> {
  await trx.insertInto("run").values(run).execute();
  await trx.insertInto("runFile").values({ runId: run.id, content }).execute();
}

/** The bytes of a run as uploaded. @throws AppError `run.not_found` */
export async function getRunFile(db: Db, runId: string): Promise<Buffer> {
  const row = await db
    .selectFrom("runFile")
    .select("content")
    .where("runId", "=", runId)
    .executeTakeFirstOrThrow(() => notFound(runId));
  return row.content;
}

/** Equipment as it stood when a run used it. */
export interface RunEquipmentRow {
  runId: string;
  equipmentId: string;
  code: string;
  kind: string;
  certificate: string;
  /** `YYYY-MM-DD` */
  calibratedUntil: string;
  uncertainty: number;
  coverageFactor: number;
  positions: ChamberPositionRow[];
}

type Certificate = Pick<
  RunEquipmentRow,
  "certificate" | "calibratedUntil" | "uncertainty" | "coverageFactor" | "positions"
>;

/** Notes which equipment a run used, with its certificate as of now. */
export async function insertRunEquipment(
  trx: Trx,
  runId: string,
  equipment: readonly (Certificate & { id: string })[],
): Promise<void> {
  if (equipment.length === 0) return;
  const rows = equipment.map(({ id, positions, ...rest }) => {
    return { runId, equipmentId: id, ...rest, positions: JSON.stringify(positions) };
  });
  await trx.insertInto("runEquipment").values(rows).execute();
}

/** Equipment of runs, by run and code. */
export async function listRunEquipment(db: Db, runIds: readonly string[]): Promise<RunEquipmentRow[]> {
  if (runIds.length === 0) return [];
  const rows = await db
    .selectFrom("runEquipment")
    .innerJoin("equipment", "equipment.id", "runEquipment.equipmentId")
    .select([
      "runEquipment.runId",
      "runEquipment.equipmentId",
      "equipment.code",
      "equipment.kind",
      "runEquipment.certificate",
      "runEquipment.calibratedUntil",
      "runEquipment.uncertainty",
      "runEquipment.coverageFactor",
      "runEquipment.positions",
    ])
    .where("runEquipment.runId", "in", [...runIds])
    .orderBy("runEquipment.runId")
    .orderBy("equipment.code")
    .execute();
  return rows.map((row) => ({ ...row, positions: row.positions as unknown as ChamberPositionRow[] }));
}

/** A finding as stored: one of the arithmetic's, with an id to acknowledge it by. */
export type StoredFinding = Finding & { id: string };

export type RunFindingRow = StoredFinding & { runId: string };

/** Stores what the rules say about a run. */
export async function insertRunFindings(trx: Trx, runId: string, findings: readonly StoredFinding[]): Promise<void> {
  if (findings.length === 0) return;
  const rows = findings.map(({ data, ...finding }) => ({ ...finding, runId, data: JSON.stringify(data ?? {}) }));
  await trx.insertInto("runFinding").values(rows).execute();
}

/** Findings of runs in the order in which they were made. */
export async function listRunFindings(db: Db, runIds: readonly string[]): Promise<RunFindingRow[]> {
  if (runIds.length === 0) return [];
  const rows = await db
    .selectFrom("runFinding")
    .select(["id", "runId", "code", "severity", "serial", "point", "message", "data"])
    .where("runId", "in", [...runIds])
    .orderBy("id")
    .execute();
  return rows.map((row) => ({
    ...row,
    severity: row.severity as Finding["severity"],
    data: row.data as Exclude<Json, null> as Record<string, unknown>,
  }));
}

/** Equipment by codes, as far as there is any. */
export async function findEquipmentByCodes(
  db: Db,
  codes: readonly string[],
): Promise<(Certificate & { id: string; code: string })[]> {
  if (codes.length === 0) return [];
  const rows = await db
    .selectFrom("equipment")
    .select(["id", "code", "certificate", "calibratedUntil", "uncertainty", "coverageFactor", "positions"])
    .where("code", "in", [...codes])
    .orderBy("code")
    .execute();
  return rows.map((row) => ({ ...row, positions: row.positions as unknown as ChamberPositionRow[] }));
}
