import type { Db, Trx } from "@/db/executor";
import { isUuid } from "@/db/queries/code-or-id";
import type { StoredFinding } from "@/db/queries/runs";
import { slicesOf } from "@/db/slices";
import type { EnvelopeSurvey } from "@/lib/domain/compensation/survey-envelope";
import type { Finding, Method, PooledResult, VerificationResult } from "@/lib/domain/compensation/types";
import type { UncertaintyBudget } from "@/lib/domain/compensation/uncertainty/budget-types";
import { AppError } from "@/lib/errors";

export type DerivationMethod = Method | "import";
export type DerivationState = "working" | "proposed" | "approved" | "partly-approved" | "refused" | "failed";

/** Devices of a derivation by role, by whether they got values, and findings by severity. */
export interface DerivationCounts {
  devices?: number;
  withValues?: number;
  roles?: Record<string, number>;
  findings?: Record<Finding["severity"], number>;
}

export interface DerivationRow {
  id: string;
  lotId: string;
  lotCode: string;
  familyCode: string;
  familyRevisionId: string;
  revisionNumber: number;
  method: DerivationMethod;
  order: 1 | 2;
  state: DerivationState;
  /** Version of the arithmetic. */
  engine: string;
  /** Of the inputs (contract, section 5). */
  sha256: Buffer;
  provenLowC: number | null;
  provenHighC: number | null;
  pooled: PooledResult | null;
  verification: VerificationResult[];
  /** Null for imports, and for derivations of before there were budgets. */
  uncertainty: UncertaintyBudget | null;
  /** Null where `uncertainty` is. */
  envelope: EnvelopeSurvey | null;
  counts: DerivationCounts;
  progressDone: number;
  progressTotal: number;
  progressStep: string;
  failure: { code: string; message: string } | null;
  createdAt: Date;
  createdBy: string;
  createdByName: string;
  finishedAt: Date | null;
}

function selectDerivation(db: Db) {
  return db
    .selectFrom("derivation")
    .innerJoin("lot", "lot.id", "derivation.lotId")
    .innerJoin("family", "family.id", "lot.familyId")
    .innerJoin("familyRevision", "familyRevision.id", "derivation.familyRevisionId")
    .innerJoin("person", "person.id", "derivation.createdBy")
    .select([
      "derivation.id",
      "derivation.lotId",
      "lot.code as lotCode",
      "family.code as familyCode",
      "derivation.familyRevisionId",
      "familyRevision.number as revisionNumber",
      "derivation.method",
      "derivation.fitOrder as order",
      "derivation.state",
      "derivation.engine",
      "derivation.sha256",
      "derivation.provenLowC",
      "derivation.provenHighC",
      "derivation.pooled",
      "derivation.verification",
      "derivation.uncertainty",
      "derivation.envelope",
      "derivation.counts",
      "derivation.progressDone",
      "derivation.progressTotal",
      "derivation.progressStep",
      "derivation.failure",
      "derivation.createdAt",
      "derivation.createdBy",
      "person.name as createdByName",
      "derivation.finishedAt",
    ]);
}

type SelectedRow = Awaited<ReturnType<ReturnType<typeof selectDerivation>["executeTakeFirstOrThrow"]>>;
const rowOf = (row: SelectedRow) => row as unknown as DerivationRow;

const notFound = (id: string) =>
  new AppError("derivation.not_found", { derivation: id, message: `There is no derivation ${id}.` });

/** A derivation; an id that is none names none. @throws AppError `derivation.not_found` */
export async function getDerivation(db: Db, id: string): Promise<DerivationRow> {
  if (!isUuid(id)) throw notFound(id);
  const row = await selectDerivation(db)
    .where("derivation.id", "=", id)
    .executeTakeFirstOrThrow(() => notFound(id));
  return rowOf(row);
}

/** A derivation, locked until commit. @throws AppError `derivation.not_found` */
export async function lockDerivation(trx: Trx, id: string): Promise<DerivationRow> {
  const row = await selectDerivation(trx)
    .where("derivation.id", "=", id)
    .forUpdate("derivation")
    .executeTakeFirstOrThrow(() => notFound(id));
  return rowOf(row);
}

/** A lot's derivations and imports, newest first; all of them unless a page is asked for. */
export async function listDerivationsOfLot(
  db: Db,
  lotId: string,
  page: { before?: string; limit?: number } = {},
): Promise<DerivationRow[]> {
  let query = selectDerivation(db).where("derivation.lotId", "=", lotId).orderBy("derivation.id", "desc");
  if (page.before !== undefined) query = query.where("derivation.id", "<", page.before);
  if (page.limit !== undefined) query = query.limit(page.limit);
  return (await query.execute()).map(rowOf);
}

/** Derivations that used a run, newest first. */
export async function listDerivationsOfRun(db: Db, runId: string): Promise<DerivationRow[]> {
  const rows = await selectDerivation(db)
    .innerJoin("derivationRun", "derivationRun.derivationId", "derivation.id")
    .where("derivationRun.runId", "=", runId)
    .orderBy("derivation.id", "desc")
    .execute();
  return rows.map(rowOf);
}

export interface NewDerivation {
  id: string;
  lotId: string;
  familyRevisionId: string;
  method: DerivationMethod;
  order: 1 | 2;
  engine: string;
  sha256: Buffer;
  runIds: readonly string[];
  exclusions: readonly { deviceId: string; reason: string }[];
  progressTotal: number;
  createdAt: Date;
  createdBy: string;
}

/** Adds a derivation in state working, with its runs and exclusions. */
export async function insertDerivation(trx: Trx, derivation: NewDerivation): Promise<void> {
  const { runIds, exclusions, order, ...row } = derivation;
  await trx
    .insertInto("derivation")
    .values({ ...row, fitOrder: order, state: "working" })
    .execute();
  const runs = runIds.map((runId) => ({ derivationId: row.id, runId }));
  if (runs.length > 0) await trx.insertInto("derivationRun").values(runs).execute();
  const excluded = exclusions.map((exclusion) => ({
    ...exclusion,
    derivationId: row.id,
    personId: derivation.createdBy,
  }));
  if (excluded.length > 0) await trx.insertInto("derivationExclusion").values(excluded).execute();
}

/** Keeps the bytes of an import. */
export async function insertImportFile(trx: Trx, derivationId: string, sha256: Buffer, content: Buffer): Promise<void> {
  await trx.insertInto("importFile").values({ derivationId, sha256, content }).execute();
}

/** Ids of the runs of a derivation. */
export async function listDerivationRunIds(db: Db, derivationId: string): Promise<string[]> {
  const rows = await db
    .selectFrom("derivationRun")
    .select("runId")
    .where("derivationId", "=", derivationId)
    .orderBy("runId")
    .execute();
  return rows.map((row) => row.runId);
}

export interface ExclusionRow {
  serial: string;
  reason: string;
  personId: string;
  personName: string;
}

/** Devices excluded from a derivation, by serial. */
export async function listExclusions(db: Db, derivationId: string): Promise<ExclusionRow[]> {
  return db
    .selectFrom("derivationExclusion")
    .innerJoin("device", "device.id", "derivationExclusion.deviceId")
    .innerJoin("person", "person.id", "derivationExclusion.personId")
    .select([
      "device.serial",
      "derivationExclusion.reason",
      "derivationExclusion.personId",
      "person.name as personName",
    ])
    .where("derivationExclusion.derivationId", "=", derivationId)
    .orderBy("device.serial")
    .execute();
}

/** Notes how far a derivation has come; does nothing once it is no longer working. */
export async function updateDerivationProgress(
  db: Db,
  id: string,
  progress: { done: number; total: number; step: string },
): Promise<void> {
  await db
    .updateTable("derivation")
    .set({ progressDone: progress.done, progressTotal: progress.total, progressStep: progress.step })
    .where("id", "=", id)
    .where("state", "=", "working")
    .execute();
}

export interface FinishedDerivation {
  provenRange: [number, number] | null;
  pooled: PooledResult | null;
  verification: readonly VerificationResult[];
  uncertainty: UncertaintyBudget | null;
  envelope: EnvelopeSurvey | null;
  counts: DerivationCounts;
  progressTotal: number;
  finishedAt: Date;
}

/** Stores the result of a working derivation and proposes it. */
export async function finishDerivation(trx: Trx, id: string, result: FinishedDerivation): Promise<void> {
  await trx
    .updateTable("derivation")
    .set({
      state: "proposed",
      provenLowC: result.provenRange?.[0] ?? null,
      provenHighC: result.provenRange?.[1] ?? null,
      pooled: result.pooled === null ? null : JSON.stringify(result.pooled),
      verification: JSON.stringify(result.verification),
      uncertainty: result.uncertainty === null ? null : JSON.stringify(result.uncertainty),
      envelope: result.envelope === null ? null : JSON.stringify(result.envelope),
      counts: JSON.stringify(result.counts),
      progressDone: result.progressTotal,
      progressTotal: result.progressTotal,
      progressStep: "done",
      finishedAt: result.finishedAt,
    })
    .where("id", "=", id)
    .execute();
}

/** Ends a working derivation without a result. */
export async function failDerivation(
  trx: Trx,
  id: string,
  failure: { code: string; message: string },
  finishedAt: Date,
): Promise<void> {
  await trx
    .updateTable("derivation")
    .set({ state: "failed", failure: JSON.stringify(failure), finishedAt })
    .where("id", "=", id)
    .where("state", "=", "working")
    .execute();
}

/** Moves a decided derivation to its state. */
export async function updateDerivationState(trx: Trx, id: string, state: DerivationState): Promise<void> {
  await trx.updateTable("derivation").set({ state }).where("id", "=", id).execute();
}

const FINDINGS_A_STATEMENT = 2_000;

/** Stores findings of a derivation: of the lot (serial null) and of devices. */
export async function insertDerivationFindings(
  trx: Trx,
  derivationId: string,
  findings: readonly StoredFinding[],
): Promise<void> {
  for (const some of slicesOf(findings, FINDINGS_A_STATEMENT)) {
    const rows = some.map(({ data, ...finding }) => ({ ...finding, derivationId, data: JSON.stringify(data ?? {}) }));
    await trx.insertInto("derivationFinding").values(rows).execute();
  }
}

export interface FindingFilter {
  /** Id after which the page starts. */
  after?: string;
  limit?: number;
  severity?: Finding["severity"];
  serials?: readonly string[];
  /** Only findings of the lot and its runs, that name no single device. */
  lotOnly?: boolean;
}

/** Findings of a derivation in the order in which they were made: those of the lot, then device by device. */
export async function listDerivationFindings(
  db: Db,
  derivationId: string,
  filter: FindingFilter = {},
): Promise<StoredFinding[]> {
  let query = db
    .selectFrom("derivationFinding")
    .select(["id", "code", "severity", "serial", "point", "message", "data"])
    .where("derivationId", "=", derivationId)
    .orderBy("id");
  if (filter.after !== undefined) query = query.where("id", ">", filter.after);
  if (filter.severity !== undefined) query = query.where("severity", "=", filter.severity);
  if (filter.lotOnly) query = query.where("serial", "is", null);
  if (filter.serials !== undefined) query = query.where("serial", "in", [...filter.serials]);
  if (filter.limit !== undefined) query = query.limit(filter.limit);
  return (await query.execute()) as StoredFinding[];
}

export interface AcknowledgementRow {
  findingId: string;
  personId: string;
  personName: string;
  reason: string;
  at: Date;
}

/** Stores why findings were accepted, each under the decision it was given with. */
export async function insertAcknowledgements(
  trx: Trx,
  rows: readonly {
    id: string;
    derivationId: string;
    findingId: string;
    approvalId: string;
    personId: string;
    reason: string;
    at: Date;
  }[],
): Promise<void> {
  for (const some of slicesOf(rows, FINDINGS_A_STATEMENT)) {
    await trx.insertInto("acknowledgement").values(some).execute();
  }
}

/** Acknowledgements of a derivation, oldest first. */
export async function listAcknowledgements(db: Db, derivationId: string): Promise<AcknowledgementRow[]> {
  return db
    .selectFrom("acknowledgement")
    .innerJoin("person", "person.id", "acknowledgement.personId")
    .select([
      "acknowledgement.findingId",
      "acknowledgement.personId",
      "person.name as personName",
      "acknowledgement.reason",
      "acknowledgement.at",
    ])
    .where("acknowledgement.derivationId", "=", derivationId)
    .orderBy("acknowledgement.id")
    .execute();
}
