import { appErrorFromDatabase } from "@/db/constraint-codes";
import { markSetsStale } from "@/db/queries/coefficients";
import {
  type DerivationRow,
  finishDerivation,
  getDerivation,
  insertDerivationFindings,
  listDerivationRunIds,
  listExclusions,
  lockDerivation,
  updateDerivationProgress,
} from "@/db/queries/derivations";
import { listAllDevices } from "@/db/queries/devices";
import { getLot, lockLot } from "@/db/queries/lots";
import { insertSets } from "@/db/queries/new-coefficients";
import { listRunsById, type RunRow } from "@/db/queries/runs";
import type { DerivationResult, Method } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import { compute, countResult, detailOf, listAllFindings } from "./compute";
import { readInput } from "./derivation-input";
import { endDerivation } from "./end-derivation";
import { tellDeciders } from "./tell-people";

/**
 * The worker's part of a derivation: computes it and stores the result as proposed. Taken up again after a fall it starts
 * anew, and does nothing where the result is there already. What can't be computed ends it as failed.
 * @throws what is wrong with the database or with our code, so that the queue tries again
 */
export async function runDerivation(ctx: Ctx, { derivationId }: { derivationId: string }): Promise<void> {
  const derivation = await getDerivation(ctx.db, derivationId);
  if (derivation.state !== "working") return;
  try {
    const { result, runs } = await computeStored(ctx, derivation);
    await store(ctx, derivation, result, runs);
  } catch (error) {
    const known = error instanceof AppError ? error : undefined;
    if (appErrorFromDatabase(error)?.code === "database.unavailable") throw error;
    await endDerivation(
      ctx,
      derivation,
      known ?? new AppError("server.fault", { message: "Something went wrong here; the log of the worker says what." }),
    );
    if (!known) throw error;
  }
}

async function computeStored(ctx: Ctx, derivation: DerivationRow) {
  const { id, progressTotal: total } = derivation;
  await updateDerivationProgress(ctx.db, id, { done: 0, total, step: "reading" });
  const lot = await getLot(ctx.db, derivation.lotId);
  const runs = await listRunsById(ctx.db, await listDerivationRunIds(ctx.db, id));
  const exclude = (await listExclusions(ctx.db, id)).map(({ serial, reason }) => ({ serial, reason }));
  const options = { method: derivation.method as Method, order: derivation.order, exclude };
  const { revision, rules } = await getLotRules(ctx.db, derivation);
  const input = await readInput(ctx.db, { lot, revision, rules, runs, options });
  await updateDerivationProgress(ctx.db, id, { done: Math.floor(total / 2), total, step: "computing" });
  const result = await compute(ctx.db, input);
  if (result.engine !== derivation.engine) {
    const message = "The arithmetic was renewed after this derivation was asked for; derive again.";
    throw new AppError("derivation.engine_changed", { was: derivation.engine, is: result.engine, message });
  }
  await updateDerivationProgress(ctx.db, id, { done: Math.floor((total * 4) / 5), total, step: "storing" });
  return { result, runs };
}

async function store(
  ctx: Ctx,
  { id, lotId, lotCode, progressTotal }: DerivationRow,
  result: DerivationResult,
  runs: RunRow[],
) {
  const ids = new Map((await listAllDevices(ctx.db, lotId)).map((device) => [device.serial, device.id]));
  const sets = result.devices.map((device) => ({
    id: ctx.newId(),
    deviceId: ids.get(device.serial) as string,
    role: device.role,
    coefficients: device.coefficients,
    detail: detailOf(device),
  }));
  const findings = listAllFindings(result).map((finding) => ({ ...finding, id: ctx.newId() }));
  const counts = countResult(result);
  await ctx.db.transaction().execute(async (trx) => {
    await lockLot(trx, lotId);
    const locked = await lockDerivation(trx, id);
    if (locked.state !== "working") return;
    await insertSets(trx, id, sets, ctx.now());
    await insertDerivationFindings(trx, id, findings);
    const { provenRange, pooled, verification, uncertainty = null, envelope = null } = result;
    await finishDerivation(trx, id, {
      provenRange,
      pooled,
      verification,
      uncertainty,
      envelope,
      counts,
      progressTotal,
      finishedAt: ctx.now(),
    });
    const staleSets = await markReplaced(trx, runs, ctx.now());
    await tellDeciders(ctx, trx, locked, {
      devices: counts.withValues - staleSets,
      toAcknowledge: counts.findings.soft,
      blocked: result.findings.some((finding) => finding.severity === "hard"),
    });
    await appendEvent(ctx, trx, {
      action: "derivation.proposed",
      subject: id,
      data: {
        lot: lotCode,
        sha256: locked.sha256.toString("hex"),
        devices: counts.devices,
        withValues: counts.withValues,
        findings: counts.findings,
        staleSets,
      },
    });
  });
}

/** A run may have been replaced while its readings were computed: what rests on it is stale from the start. */
async function markReplaced(
  trx: Parameters<typeof markSetsStale>[0],
  runs: readonly RunRow[],
  at: Date,
): Promise<number> {
  const used = new Set(runs.map((run) => run.id));
  let count = 0;
  for (const run of await listRunsById(trx, [...used])) {
    if (run.supersededById === null || used.has(run.supersededById)) continue;
    for (const stale of await markSetsStale(trx, run.id, at)) count += stale.count;
  }
  return count;
}
