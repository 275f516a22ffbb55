import { getLot } from "@/db/queries/lots";
import {
  findDrawOfLot,
  getRunPlan,
  listPlanDevices,
  listPlanEquipment,
  listPlannableDevices,
  listPlanRuns,
  listRunPlans as listRows,
  type PlanEquipmentRow,
  type RunPlanRow,
  type RunPlanState,
} from "@/db/queries/run-plans";
import { checkPlan } from "@/lib/domain/run-plan/check-plan";
import type { PlanFinding } from "@/lib/domain/run-plan/plan-findings";
import { countPlannedRows, type RunPlan } from "@/lib/domain/run-plan/run-plan";
import { planTemplate } from "@/lib/domain/run-plan/template";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import { type Page, pageOf } from "@/lib/services/page";
import type { RunPlanSummary, RunPlanView } from "@/schemas/api/run-plans";

/** A lot's planned runs, newest first. @throws AppError `lot.not_found` */
export async function listRunPlans(
  ctx: Ctx,
  input: { lot: string; limit: number; cursor?: string; state?: RunPlanState },
): Promise<Page<RunPlanSummary>> {
  const lot = await getLot(ctx.db, input.lot);
  const { state, limit } = input;
  const rows = await listRows(ctx.db, lot.id, { before: input.cursor, limit: limit + 1, state });
  return pageOf(rows.map(summaryOf), limit, (row) => row.id);
}

/** A planned run with its devices, and what is to be said of it as things stand now. @throws AppError `run_plan.not_found` */
export async function getRunPlanView(ctx: Ctx, id: string): Promise<RunPlanView> {
  const row = await getRunPlan(ctx.db, id);
  const devices = await listPlanDevices(ctx.db, id);
  const equipment = await listPlanEquipment(ctx.db, id);
  const runs = await listPlanRuns(ctx.db, id);
  const plan = { purpose: row.purpose, devices, points: row.points };
  const draw = row.sampleDrawId === null ? undefined : await findDrawOfLot(ctx.db, row.lotId, row.sampleDrawId);
  return {
    ...summaryOf(row),
    devices,
    equipment,
    notes: row.notes,
    sampleDraw: draw ?? null,
    rows: countPlannedRows(plan),
    findings: row.state === "planned" ? await listFindings(ctx, row, plan, equipment) : [],
    runs: runs.map(({ id: run, createdAt, supersededById }) => ({
      id: run,
      createdAt: createdAt.toISOString(),
      supersededBy: supersededById,
    })),
    dropped: droppedOf(row),
  };
}

/** The readings CSV of a plan with what is planned filled in. @throws AppError `run_plan.not_found` */
export async function getPlanTemplate(ctx: Ctx, id: string): Promise<{ name: string; lot: string; csv: string }> {
  const row = await getRunPlan(ctx.db, id);
  const devices = await listPlanDevices(ctx.db, id);
  const csv = planTemplate({ purpose: row.purpose, devices, points: row.points });
  return { name: row.name, lot: row.lotCode, csv };
}

async function listFindings(
  ctx: Ctx,
  row: RunPlanRow,
  plan: RunPlan,
  equipment: readonly PlanEquipmentRow[],
): Promise<PlanFinding[]> {
  const lot = await getLot(ctx.db, row.lotId);
  const { rules } = await getLotRules(ctx.db, lot);
  const serials = plan.devices.map((device) => device.serial);
  const known = await listPlannableDevices(ctx.db, lot.id, serials);
  const devices = new Map(known.map((device) => [device.serial, device]));
  const today = ctx.now().toISOString().slice(0, 10);
  return checkPlan(plan, { family: rules, devices, equipment, today });
}

function summaryOf(row: RunPlanRow): RunPlanSummary {
  return {
    id: row.id,
    lot: row.lotCode,
    name: row.name,
    purpose: row.purpose,
    state: row.state,
    deviceCount: row.deviceCount,
    points: row.points.map((point) => ({ ...point, loadsKg: [...point.loadsKg] })),
    equipmentCodes: row.equipmentCodes,
    createdAt: row.createdAt.toISOString(),
    createdBy: row.createdByName,
  };
}

function droppedOf({ dropReason, droppedByName, droppedAt }: RunPlanRow): RunPlanView["dropped"] {
  if (dropReason === null || droppedAt === null) return null;
  return { reason: dropReason, by: droppedByName ?? "", at: droppedAt.toISOString() };
}
