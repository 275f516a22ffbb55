import { getLot, lockLot } from "@/db/queries/lots";
import { findDrawOfLot, insertRunPlan, listPlannableDevices } from "@/db/queries/run-plans";
import { findEquipmentByCodes } from "@/db/queries/runs";
import { checkPlan } from "@/lib/domain/run-plan/check-plan";
import type { PlanFinding } from "@/lib/domain/run-plan/plan-findings";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { NewRunPlan } from "@/schemas/api/run-plans";

const NAMED_MAX = 100;

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
    const { rules } = await getLotRules(trx, lot);
    const codes = [...new Set(input.equipment)];
    const equipment = await findEquipmentByCodes(trx, codes);
    assertAllFound(
      codes,
      equipment.map((one) => one.code),
    );
    if (input.sampleDraw !== undefined && !(await findDrawOfLot(trx, lot.id, input.sampleDraw)))
      throw new AppError("draw.not_found", { draw: input.sampleDraw, message: "The lot has no such draw." });
    const serials = input.devices.map((device) => device.serial);
    const devices = await listPlannableDevices(trx, lot.id, serials);
    const known = new Map(devices.map((device) => [device.serial, device]));
    const today = ctx.now().toISOString().slice(0, 10);
    assertNothingHard(checkPlan(input, { family: rules, devices: known, equipment, today }), input);
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
    const data = { lot: lot.code, name, purpose, devices: serials.length, points, equipment: codes };
    await appendEvent(ctx, trx, { action: "run.planned", subject: id, data, texts: { notes } });
    return id;
  });
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
