import { listApprovals } from "@/db/queries/approvals";
import { countSetStates, getSet, listSets } from "@/db/queries/coefficients";
import {
  type DerivationRow,
  getDerivation,
  listAcknowledgements,
  listDerivationFindings,
  listDerivationRunIds,
  listDerivationsOfLot,
  listDerivationsOfRun,
  listExclusions,
} from "@/db/queries/derivations";
import { getLot } from "@/db/queries/lots";
import { listMakers } from "@/db/queries/makers";
import { listRunsById } from "@/db/queries/runs";
import { deviceCovariance } from "@/lib/domain/compensation/device-covariance";
import { driftCurves } from "@/lib/domain/compensation/predict";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import { type Page, pageOf } from "@/lib/services/page";
import type { PageQuery } from "@/schemas/api/common";
import type { DerivationSummary, DerivationView, DerivedDevice, DerivedDeviceDetail } from "@/schemas/api/derivations";
import type { FindingView } from "@/schemas/api/runs";
import type { DeviceDetail } from "./compute";
import { deviceViewOf } from "./device-view";
import { SHOWN_MAX } from "./preview-view";

const NO_FINDINGS = { hard: 0, soft: 0, note: 0 };

const rangeOf = ({ provenLowC, provenHighC }: DerivationRow): [number, number] | null =>
  provenLowC === null || provenHighC === null ? null : [provenLowC, provenHighC];

/** A derivation with all that stands about it. @throws AppError `derivation.not_found` */
export async function getDerivationView(ctx: Ctx, id: string): Promise<DerivationView> {
  const row = await getDerivation(ctx.db, id);
  const runs = await listRunsById(ctx.db, await listDerivationRunIds(ctx.db, id));
  const makers = await listMakers(ctx.db, "derivation", id);
  const exclusions = await listExclusions(ctx.db, id);
  const approvals = await listApprovals(ctx.db, "derivation", id);
  const acknowledgements = await listAcknowledgements(ctx.db, id);
  const { actor } = ctx;
  return {
    id,
    state: row.state,
    lot: row.lotCode,
    family: row.familyCode,
    revision: row.revisionNumber,
    sha256: row.sha256.toString("hex"),
    engine: row.engine,
    method: row.method,
    order: row.order,
    provenRange: rangeOf(row),
    ...(row.pooled && { pooled: row.pooled }),
    counts: {
      devices: row.counts.devices ?? 0,
      withValues: row.counts.withValues ?? 0,
      roles: row.counts.roles ?? {},
      states: await countSetStates(ctx.db, id),
      findings: row.counts.findings ?? NO_FINDINGS,
    },
    findings: await listDerivationFindings(ctx.db, id, { limit: SHOWN_MAX }),
    verification: row.verification,
    envelope: row.envelope,
    uncertainty: row.uncertainty,
    runs: runs.map((run) => ({
      id: run.id,
      purpose: run.purpose,
      sha256: run.sha256.toString("hex"),
      supersededBy: run.supersededById,
    })),
    exclude: exclusions.map(({ serial, reason, personName }) => ({ serial, reason, by: personName })),
    progress: { done: row.progressDone, total: row.progressTotal, step: row.progressStep },
    failure: row.failure,
    makers: makers.map(({ name, act, at }) => ({ name, act, at: at.toISOString() })),
    mayDecide:
      actor.kind === "person" &&
      actor.roles.includes("reviewer") &&
      !makers.some((maker) => maker.personId === actor.id),
    approvals: approvals.map(({ decision, personName, meaning, reason, at }) => ({
      decision: decision as "approve" | "refuse" | "revoke",
      name: personName,
      meaning,
      reason,
      at: at.toISOString(),
    })),
    acknowledgements: acknowledgements.map(({ findingId, reason, personName, at }) => ({
      finding: findingId,
      reason,
      by: personName,
      at: at.toISOString(),
    })),
    createdAt: row.createdAt.toISOString(),
    createdBy: row.createdByName,
    finishedAt: row.finishedAt?.toISOString() ?? null,
  };
}

/** A lot's derivations and imports, newest first. @throws AppError `lot.not_found` */
export async function listLotDerivations(ctx: Ctx, lot: string, page: PageQuery): Promise<Page<DerivationSummary>> {
  const { id } = await getLot(ctx.db, lot);
  const found = await listDerivationsOfLot(ctx.db, id, { before: page.cursor, limit: page.limit + 1 });
  const { items, next } = pageOf(found, page.limit, (row) => row.id);
  return { next, items: items.map(summaryOf) };
}

function summaryOf(row: DerivationRow): DerivationSummary {
  return {
    id: row.id,
    state: row.state,
    method: row.method,
    order: row.order,
    sha256: row.sha256.toString("hex"),
    provenRange: rangeOf(row),
    devices: row.counts.devices ?? 0,
    withValues: row.counts.withValues ?? 0,
    findings: row.counts.findings ?? NO_FINDINGS,
    createdAt: row.createdAt.toISOString(),
    createdBy: row.createdByName,
    finishedAt: row.finishedAt?.toISOString() ?? null,
  };
}

/** Derivations that used a run, newest first. */
export async function listRunUses(ctx: Ctx, runId: string): Promise<DerivationSummary[]> {
  return (await listDerivationsOfRun(ctx.db, runId)).map(summaryOf);
}

/** Devices of a derivation by serial, each with its findings. @throws AppError `derivation.not_found` */
export async function listDerivedDevices(ctx: Ctx, id: string, page: PageQuery): Promise<Page<DerivedDevice>> {
  await getDerivation(ctx.db, id);
  const found = await listSets(ctx.db, id, { after: page.cursor, limit: page.limit + 1 });
  const { items, next } = pageOf(found, page.limit, (set) => set.serial);
  const serials = items.map((set) => set.serial);
  const bySerial = new Map<string, FindingView[]>(serials.map((serial) => [serial, []]));
  for (const finding of await listDerivationFindings(ctx.db, id, { serials }))
    bySerial.get(finding.serial ?? "")?.push(finding);
  return { items: items.map((set) => deviceViewOf(set, bySerial.get(set.serial) ?? [])), next };
}

/** One device of a derivation with its points and drift curves. @throws AppError `derivation.not_found`, `coefficients.not_found` */
export async function getDerivedDevice(ctx: Ctx, id: string, serial: string): Promise<DerivedDeviceDetail> {
  const derivation = await getDerivation(ctx.db, id);
  const set = await getSet(ctx.db, id, serial);
  const { rules } = await getLotRules(ctx.db, derivation);
  const { points = [] } = set.detail as Partial<DeviceDetail>;
  const findings = await listDerivationFindings(ctx.db, id, { serials: [serial] });
  return {
    ...deviceViewOf(set, findings),
    points,
    covariance:
      set.coefficients && points.length > 0
        ? deviceCovariance(points, set.coefficients, derivation.order, rules)
        : { zero: null, gain: null },
    curves: set.coefficients && points.length > 0 ? driftCurves(points, set.coefficients, rules) : null,
  };
}

/** All findings of a derivation, those of the lot first. @throws AppError `derivation.not_found` */
export async function listFindings(ctx: Ctx, id: string, page: PageQuery): Promise<Page<FindingView>> {
  await getDerivation(ctx.db, id);
  const found = await listDerivationFindings(ctx.db, id, { after: page.cursor, limit: page.limit + 1 });
  return pageOf(found, page.limit, (finding) => finding.id);
}
