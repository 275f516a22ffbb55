import type { Trx } from "@/db/executor";
import { getRunPlan, listPlanDevices, listPlanEquipment, markPlanUsed, type RunPlanRow } from "@/db/queries/run-plans";
import { listSetPointFindings } from "@/lib/domain/compensation/set-points";
import type { Finding, Purpose, Reading } from "@/lib/domain/compensation/types";
import { compareEquipment, compareWithPlan } from "@/lib/domain/run-plan/compare-run";
import type { PlannedPoint } from "@/lib/domain/run-plan/run-plan";
import type { Steps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";

export interface UsedPlan {
  id: string;
  state: RunPlanRow["state"];
  points: readonly PlannedPoint[];
  /** What a run has that the plan doesn't, and the other way round. */
  compare: (readings: readonly Reading[], equipment: readonly string[]) => Steps<Finding[]>;
}

/**
 * The plan that an upload names; undefined where it names none. The database asks again under the plan's lock.
 * @throws AppError `run_plan.not_found`, `run_plan.other_lot`, `run_plan.other_purpose`, `run_plan.wrong_state`
 */
export async function findUsedPlan(
  ctx: Ctx,
  input: { lotId: string; purpose: Purpose; plan?: string; supersedes?: string },
): Promise<UsedPlan | undefined> {
  if (input.plan === undefined) return undefined;
  const row = await getRunPlan(ctx.db, input.plan);
  assertUsable(row, input);
  const devices = await listPlanDevices(ctx.db, row.id);
  const planned = (await listPlanEquipment(ctx.db, row.id)).map((one) => one.code);
  const plan = { purpose: row.purpose, devices, points: row.points };
  return {
    id: row.id,
    state: row.state,
    points: row.points,
    compare: function* (readings, equipment) {
      return [
        ...(yield* compareWithPlan(plan, readings)),
        ...(yield* listSetPointFindings(readings, row.points)),
        ...compareEquipment(planned, equipment),
      ];
    },
  };
}

function assertUsable(row: RunPlanRow, input: { lotId: string; purpose: Purpose; supersedes?: string }): void {
  if (row.lotId !== input.lotId)
    throw new AppError("run_plan.other_lot", { lot: row.lotCode, message: `That plan is one of lot ${row.lotCode}.` });
  if (row.purpose !== input.purpose) {
    const message = `“${row.name}” plans a ${row.purpose} run; upload it as one, or without the plan.`;
    throw new AppError("run_plan.other_purpose", { purpose: row.purpose, message });
  }
  if (row.state === "dropped" || (row.state === "used" && input.supersedes === undefined)) {
    const message =
      row.state === "dropped"
        ? `“${row.name}” was dropped; upload without it, or plan anew.`
        : `Readings of “${row.name}” were uploaded before; a corrected file replaces that run.`;
    throw new AppError("run_plan.wrong_state", { state: row.state, message });
  }
}

/** Notes that the run, stored in this transaction, was the planned one. */
export async function takeUsedPlan(trx: Trx, plan: UsedPlan | undefined): Promise<void> {
  if (plan?.state === "planned") await markPlanUsed(trx, plan.id);
}
