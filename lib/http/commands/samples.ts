import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { drawSample as draw, listSampleDraws as list } from "@/lib/services/samples/draw-sample";
import { getSamplePlan } from "@/lib/services/samples/get-sample-plan";
import { byCodeOrId, idPageQuery } from "@/schemas/api/common";
import { newSampleDraw, sampleDraw, sampleDrawPage } from "@/schemas/api/sample-draws";
import { samplePlan, samplePlanQuery } from "@/schemas/api/sample-plan";

export const listSampleDraws = command({
  id: "samples.list-draws",
  method: "GET",
  path: "/lots/{code}/sample-draws",
  summary: "Samples drawn at random from a lot, newest first",
  access: { who: "person", roles: READERS },
  params: byCodeOrId,
  query: idPageQuery,
  reply: { status: 200, schema: sampleDrawPage },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => list(ctx, { ...query, lot: params.code }),
});

export const drawSample = command({
  id: "samples.draw",
  method: "POST",
  path: "/lots/{code}/sample-draws",
  summary: "Draws a sample at random, balanced over gauge and material batches, and records how",
  access: { who: "person", roles: ["engineer"] },
  params: byCodeOrId,
  body: newSampleDraw,
  reply: { status: 201, schema: sampleDraw },
  errors: ["lot.not_found", "draw.too_few"],
  idempotent: true,
  handle: (ctx, { params, body }) => draw(ctx, { ...body, lot: params.code }),
});

export const planSample = command({
  id: "samples.plan",
  method: "GET",
  path: "/lots/{code}/sample-plan",
  summary: "How many sample and verification devices a lot takes for an expected scatter of gainTc",
  access: { who: "person", roles: READERS },
  params: byCodeOrId,
  query: samplePlanQuery,
  reply: { status: 200, schema: samplePlan },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => getSamplePlan(ctx, { ...query, lot: params.code }),
});

export const sampleCommands = [listSampleDraws, drawSample, planSample];
