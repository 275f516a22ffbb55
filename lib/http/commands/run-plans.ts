import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { dropRunPlan as drop } from "@/lib/services/run-plans/drop-run-plan";
import { getPlanTemplate, getRunPlanView, listRunPlans as list } from "@/lib/services/run-plans/get-run-plan";
import { checkRunPlan as check, planRun as plan } from "@/lib/services/run-plans/plan-run";
import { byCodeOrId, byId } from "@/schemas/api/common";
import {
  dropRunPlan as dropBody,
  newRunPlan,
  runPlan,
  runPlanCheck,
  runPlanDraft,
  runPlanPage,
  runPlanQuery,
} from "@/schemas/api/run-plans";

const readers = { who: "person", roles: READERS } as const;
const engineer = { who: "person", roles: ["engineer"] } as const;

export const listRunPlans = command({
  id: "run-plans.list",
  method: "GET",
  path: "/lots/{code}/run-plans",
  summary: "Planned runs of a lot, newest first",
  access: readers,
  params: byCodeOrId,
  query: runPlanQuery,
  reply: { status: 200, schema: runPlanPage },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => list(ctx, { ...query, lot: params.code }),
});

export const planRun = command({
  id: "run-plans.add",
  method: "POST",
  path: "/lots/{code}/run-plans",
  summary: "Plans a run: devices with their positions, temperatures, soak, loads, dwell and equipment",
  access: engineer,
  params: byCodeOrId,
  body: newRunPlan,
  reply: { status: 201, schema: runPlan },
  errors: ["lot.not_found", "run_plan.exists", "run_plan.invalid", "run.equipment_unknown", "draw.not_found"],
  idempotent: true,
  handle: async (ctx, { params, body }) => getRunPlanView(ctx, await plan(ctx, { ...body, lot: params.code })),
});

export const checkRunPlan = command({
  id: "run-plans.check",
  method: "POST",
  path: "/lots/{code}/run-plans/check",
  summary: "What is to be said of a plan that is still being written; nothing is stored",
  access: { ...engineer, reads: true },
  params: byCodeOrId,
  body: runPlanDraft,
  reply: { status: 200, schema: runPlanCheck },
  errors: ["lot.not_found", "run.equipment_unknown"],
  handle: (ctx, { params, body }) => check(ctx, { ...body, lot: params.code }),
});

export const getRunPlan = command({
  id: "run-plans.get",
  method: "GET",
  path: "/run-plans/{id}",
  summary: "A planned run with its devices, equipment and findings",
  access: readers,
  params: byId,
  reply: { status: 200, schema: runPlan },
  errors: ["run_plan.not_found"],
  handle: (ctx, { params }) => getRunPlanView(ctx, params.id),
});

export const dropRunPlan = command({
  id: "run-plans.drop",
  method: "POST",
  path: "/run-plans/{id}/drop",
  summary: "Drops a planned run that no readings were uploaded for",
  access: engineer,
  params: byId,
  body: dropBody,
  reply: { status: 200, schema: runPlan },
  errors: ["run_plan.not_found", "run_plan.wrong_state"],
  handle: async (ctx, { params, body }) => {
    await drop(ctx, { ...body, id: params.id });
    return getRunPlanView(ctx, params.id);
  },
});

/** A name that every file system takes. */
const fileName = (text: string) => text.replace(/[^A-Za-z0-9._-]+/g, "-").replace(/^-+|-+$/g, "") || "plan";

export const getRunPlanTemplate = command({
  id: "run-plans.template",
  method: "GET",
  path: "/run-plans/{id}/template",
  summary: "The readings CSV with serial, point, position and load filled in, rows in working order",
  access: readers,
  params: byId,
  reply: { status: 200, mediaTypes: ["text/csv"] },
  errors: ["run_plan.not_found"],
  handle: async (ctx, { params }) => {
    const { name, lot, csv } = await getPlanTemplate(ctx, params.id);
    return new Response(csv, {
      headers: {
        "content-type": "text/csv; charset=utf-8",
        "content-disposition": `attachment; filename="${lot}-${fileName(name)}.csv"`,
        "cache-control": "private, no-cache",
      },
    });
  },
});

export const runPlanCommands = [listRunPlans, planRun, checkRunPlan, getRunPlan, dropRunPlan, getRunPlanTemplate];
