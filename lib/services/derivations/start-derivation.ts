import type { Trx } from "@/db/executor";
import { insertDerivation } from "@/db/queries/derivations";
import { type DeviceRow, findDevicesBySerial } from "@/db/queries/devices";
import { getLot } from "@/db/queries/lots";
import { insertMakers, type MakerAct } from "@/db/queries/makers";
import { COMPENSATION_ENGINE } from "@/lib/domain/compensation/derive";
import { AppError } from "@/lib/errors";
import { enqueue } from "@/lib/jobs/enqueue";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { DerivationPreview, NewDerivationBody } from "@/schemas/api/derivations";
import { compute } from "./compute";
import { type DerivationPlan, digestOf, getUsableRuns, readInput } from "./derivation-input";
import { previewOf } from "./preview-view";

type Input = NewDerivationBody & { lot: string };

/** What is to be derived. @throws AppError `lot.not_found`, `derivation.exclude_unknown`, and as {@link getUsableRuns} */
async function plan(
  ctx: PersonCtx,
  { lot: code, ...options }: Input,
): Promise<DerivationPlan & { excluded: DeviceRow[] }> {
  assertRole(ctx, "engineer");
  const lot = await getLot(ctx.db, code);
  const runs = await getUsableRuns(ctx.db, lot, options.runs);
  const excluded = (
    await findDevicesBySerial(
      ctx.db,
      options.exclude.map((one) => one.serial),
    )
  ).filter((device) => device.lotId === lot.id);
  const unknown = options.exclude
    .map((one) => one.serial)
    .filter((serial) => !excluded.some((one) => one.serial === serial));
  if (unknown.length > 0) {
    const message = `${unknown.slice(0, 5).join(", ")} can't be excluded: not in lot ${lot.code}.`;
    throw new AppError("derivation.exclude_unknown", { serials: unknown, message });
  }
  return { lot, ...(await getLotRules(ctx.db, lot)), runs, options, excluded };
}

/** Computes at once what a derivation would give; nothing is stored. @throws as {@link startDerivation}, and as the arithmetic does */
export async function previewDerivation(ctx: PersonCtx, input: Input): Promise<DerivationPreview> {
  const planned = await plan(ctx, input);
  const result = await compute(ctx.db, await readInput(ctx.db, planned));
  return previewOf(planned, digestOf(planned, result.engine), result, ctx.newId);
}

/**
 * Records what is to be derived and hands it to the worker.
 * @throws AppError `lot.not_found`, `run.not_found`, `derivation.run_of_other_lot`, `derivation.run_superseded`,
 * `derivation.no_readings`, `run.serial_repeated`, `derivation.exclude_unknown`
 */
export async function startDerivation(ctx: PersonCtx, input: Input): Promise<{ id: string; state: "working" }> {
  const planned = await plan(ctx, input);
  const { lot, revision, runs, options, excluded } = planned;
  const sha256 = digestOf(planned, COMPENSATION_ENGINE);
  const id = ctx.newId();
  const reasons = new Map(options.exclude.map((one) => [one.serial, one.reason]));
  await ctx.db.transaction().execute(async (trx) => {
    await insertDerivation(trx, {
      id,
      lotId: lot.id,
      familyRevisionId: revision.id,
      method: options.method,
      order: options.order,
      engine: COMPENSATION_ENGINE,
      sha256: Buffer.from(sha256, "hex"),
      runIds: runs.map((run) => run.id),
      exclusions: excluded.map((device) => ({ deviceId: device.id, reason: reasons.get(device.serial) ?? "" })),
      progressTotal: runs.reduce((sum, run) => sum + run.rowCount, 0),
      createdAt: ctx.now(),
      createdBy: ctx.actor.id,
    });
    await recordMakers(ctx, trx, id, planned);
    await enqueue(trx, "derive", { derivationId: id });
    await appendEvent(ctx, trx, {
      action: "derivation.started",
      subject: id,
      data: {
        lot: lot.code,
        method: options.method,
        order: options.order,
        sha256,
        runs: runs.map((run) => run.id),
        exclude: options.exclude.map((one) => one.serial),
      },
      texts: { exclusions: options.exclude.length > 0 ? JSON.stringify(options.exclude) : null },
    });
  });
  return { id, state: "working" };
}

async function recordMakers(ctx: PersonCtx, trx: Trx, id: string, { runs, options }: DerivationPlan): Promise<void> {
  const makers: { personId: string; act: MakerAct }[] = [{ personId: ctx.actor.id, act: "derived" }];
  if (options.exclude.length > 0) makers.push({ personId: ctx.actor.id, act: "excluded" });
  for (const personId of new Set(runs.map((run) => run.createdBy))) makers.push({ personId, act: "uploaded" });
  const subject = { subjectKind: "derivation" as const, subjectId: id, at: ctx.now() };
  await insertMakers(
    trx,
    makers.map((maker) => ({ ...maker, ...subject, id: ctx.newId() })),
  );
}
