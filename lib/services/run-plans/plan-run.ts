import type { Db } from "@/db/executor";
import { getLot, type LotRow, lockLot } from "@/db/queries/lots";
import { findDrawOfLot, insertRunPlan, listPlannableDevices } from "@/db/queries/run-plans";
import { findEquipmentByCodes } from "@/db/queries/runs";
import { checkPlan } from "@/lib/domain/run-plan/check-plan";
import type { PlanFinding } from "@/lib/domain/run-plan/plan-findings";
import { countPlannedRows } from "@/lib/domain/run-plan/run-plan";
import { AppError } from "@/lib/errors";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { NewRunPlan, RunPlanCheck, RunPlanDraft } from "@/schemas/api/run-plans";

const NAMED_MAX = 100;

/**
 * What is to be said of a plan that is still being written; nothing is stored.
 * @throws AppError `lot.not_found`, `run.equipment_unknown` {codes}
 */
export async function checkRunPlan(ctx: Ctx, input: RunPlanDraft & { lot: string }): Promise<RunPlanCheck> {
  const lot = await getLot(ctx.db, input.lot);
  const { findings } = await judge(ctx, ctx.db, lot, input);
  return { findings, rows: countPlannedRows(input) };
}

/**
 * Plans a run of a lot. What speaks softly against it is said and may be planned all the same.
 * @returns the plan's id.
 * @throws AppError `lot.not_found`, `run_plan.invalid` {errors}, `run_plan.exists`, `run.equipment_unknown` {codes},
 * `draw.not_found`
 */
export async function planRun(ctx: PersonCtx, input: NewRunPlan & { lot: string }): Promise<string> {
  assertRole(ctx, "engineer");
  return ctx.db.transaction().execute(async (trx) => {
    const lot = await lockLot(trx, (await getLot(trx, input.lot)).id);
    if (input.sampleDraw !== undefined && !(await findDrawOfLot(trx, lot.id, input.sampleDraw)))
      throw new AppError("draw.not_found", { draw: input.sampleDraw, message: "The lot has no such draw." });
    const { findings, known, equipment } = await judge(ctx, trx, lot, input);
    assertNothingHard(findings, input);
    const id = ctx.newId();
    const { name, purpose, points, notes = null } = input;
    await insertRunPlan(trx, {
      id,
      lotId: lot.id,
      name,
      purpose,
      points,
      notes,
      sampleDrawId: input.sampleDraw ?? null,
      createdAt: ctx.now(),
      createdBy: ctx.actor.id,
      devices: input.devices.map(({ serial, position }) => ({ id: known.get(serial)?.id as string, position })),
      equipmentIds: equipment.map((one) => one.id),
    });
    const codes = equipment.map((one) => one.code);
    const data = { lot: lot.code, name, purpose, devices: input.devices.length, points, equipment: codes };
    await appendEvent(ctx, trx, { action: "run.planned", subject: id, data, texts: { notes } });
    return id;
  });
}

/** Holds a plan against the lot's rules, devices and the equipment's dates. */
async function judge(ctx: Ctx, db: Db, lot: LotRow, plan: RunPlanDraft) {
  const { rules: family } = await getLotRules(db, lot);
  const codes = [...new Set(plan.equipment)];
  const equipment = await findEquipmentByCodes(db, codes);
  assertAllFound(
    codes,
    equipment.map((one) => one.code),
  );
  const serials = plan.devices.map((device) => device.serial);
  const known = new Map(
    (await listPlannableDevices(db, lot.id, serials)).map((device) => [device.serial, device] as const),
  );
  const today = ctx.now().toISOString().slice(0, 10);
  return { findings: checkPlan(plan, { family, devices: known, equipment, today }), known, equipment };
}

function assertAllFound(codes: readonly string[], found: readonly string[]): void {
  const unknown = codes.filter((code) => !found.includes(code));
  if (unknown.length === 0) return;
  const message = `There is no equipment ${unknown.join(", ")}; add it first.`;
  throw new AppError("run.equipment_unknown", { codes: unknown, message });
}

/** What blocks a plan, as errors with the path of what they are about. */
function assertNothingHard(findings: readonly PlanFinding[], plan: NewRunPlan): void {
  const hard = findings.filter((finding) => finding.severity === "hard");
  const [first] = hard;
  if (!first) return;
  const named = first.serial ?? (first.point === null ? null : `point ${first.point}`);
  const rest = hard.length > 1 ? ` (and ${hard.length - 1} more)` : "";
  throw new AppError("run_plan.invalid", {
    errors: hard.slice(0, NAMED_MAX).map((finding) => ({
      path: pathOf(finding, plan),
      code: finding.code,
      message: finding.message,
    })),
    errorCount: hard.length,
    message: `${named ? `${named}: ` : ""}${first.message}${rest} Nothing was planned.`,
  });
}

function pathOf({ part, serial, point }: PlanFinding, plan: NewRunPlan): string {
  if (serial !== null) return `/devices/${plan.devices.findLastIndex((device) => device.serial === serial)}`;
  if (point !== null) return `/points/${plan.points.findLastIndex((one) => one.point === point)}`;
  return `/${part}`;
}
