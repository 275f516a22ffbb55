import { z } from "zod";
import { FILE_MAX_BYTES } from "@/lib/domain/readings/parse-readings-csv";
import { READERS } from "@/lib/domain/roles";
import { getRunBytes, getRunView, listLotRuns, listRunReadings } from "@/lib/services/runs/get-run";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { byCode, byId, code, idPageQuery, pageQuery } from "@/schemas/api/common";
import { newRunQuery, newRunReply, readingPage, run, runPage } from "@/schemas/api/runs";
import { command } from "../command";

export const listRuns = command({
  id: "runs.list",
  method: "GET",
  path: "/lots/{code}/runs",
  summary: "Runs of a lot, newest first",
  access: { who: "person", roles: READERS },
  params: byCode,
  query: idPageQuery,
  reply: { status: 200, schema: runPage },
  handle: (ctx, { params, query }) => listLotRuns(ctx, params.code, query),
});

export const addRun = command({
  id: "runs.add",
  method: "POST",
  path: "/lots/{code}/runs",
  summary: "Upload the readings of a run; all of them are stored or none",
  access: { who: "person", roles: ["engineer"] },
  params: byCode,
  query: newRunQuery,
  body: { upload: { contentTypes: ["text/csv"], maxBytes: FILE_MAX_BYTES } },
  reply: { status: 201, schema: newRunReply },
  errors: [
    "lot.not_found",
    "run.invalid",
    "run.duplicate",
    "run.already_superseded",
    "run.equipment_unknown",
    "run_plan.not_found",
    "run_plan.wrong_state",
    "run.too_many_rows",
  ],
  idempotent: true,
  handle: (ctx, { params, query, body }) =>
    uploadRun(ctx, {
      ...query,
      lot: params.code,
      equipment: [...new Set(query.equipment ?? [])],
      addDevices: query.addDevices === "true",
      bytes: body.bytes,
    }),
});

export const getRun = command({
  id: "runs.get",
  method: "GET",
  path: "/runs/{id}",
  summary: "A run with its equipment and findings",
  access: { who: "person", roles: READERS },
  params: byId,
  reply: { status: 200, schema: run },
  errors: ["run.not_found"],
  handle: (ctx, { params }) => getRunView(ctx, params.id),
});

export const getRunFile = command({
  id: "runs.file",
  method: "GET",
  path: "/runs/{id}/file",
  summary: "The bytes of a run exactly as uploaded",
  access: { who: "person", roles: READERS },
  params: byId,
  reply: { status: 200, mediaTypes: ["text/csv"] },
  errors: ["run.not_found"],
  handle: async (ctx, { params }) => {
    const { run: row, bytes } = await getRunBytes(ctx, params.id);
    return new Response(new Uint8Array(bytes), {
      headers: {
        "content-type": "text/csv; charset=utf-8",
        "content-disposition": `attachment; filename="${row.lotCode}-${row.purpose}-${row.id.slice(0, 8)}.csv"`,
        "cache-control": "private, no-cache",
        "repr-digest": `sha-256=:${row.sha256.toString("base64")}:`,
      },
    });
  },
});

export const listReadings = command({
  id: "runs.readings",
  method: "GET",
  path: "/runs/{id}/readings",
  summary: "Readings of a run by row of the file",
  access: { who: "person", roles: READERS },
  params: byId,
  query: z.object({ ...pageQuery.shape, serial: code.optional() }),
  reply: { status: 200, schema: readingPage },
  errors: ["run.not_found"],
  handle: (ctx, { params, query }) => listRunReadings(ctx, params.id, query),
});

export const runCommands = [listRuns, addRun, getRun, getRunFile, listReadings];
