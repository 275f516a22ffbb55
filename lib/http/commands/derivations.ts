import { z } from "zod";
import { READERS } from "@/lib/domain/roles";
import { compareDerivations } from "@/lib/services/derivations/compare-derivations";
import { decideDerivation } from "@/lib/services/derivations/decide-derivation";
import { writeDevicesCsv, writeDevicesXlsx } from "@/lib/services/derivations/export-devices";
import {
  getDerivationView,
  getDerivedDevice,
  listDerivedDevices,
  listFindings,
  listLotDerivations,
} from "@/lib/services/derivations/get-derivation";
import { listSetPackages } from "@/lib/services/derivations/list-set-packages";
import { previewDerivation, startDerivation } from "@/lib/services/derivations/start-derivation";
import { byCode, byId, code, id, idPageQuery } from "@/schemas/api/common";
import { compareDerivationsQuery, derivationComparison } from "@/schemas/api/derivation-comparison";
import { devicesQuery, setPackages, XLSX_TYPE } from "@/schemas/api/derivation-tables";
import {
  derivation,
  derivationDecision,
  derivationPage,
  derivationPreview,
  derivedDeviceDetail,
  derivedDevicePage,
  findingPage,
  newDerivation,
  previewQuery,
  startedDerivation,
} from "@/schemas/api/derivations";
import { chooseMediaType } from "../accept";
import { command } from "../command";

const readers = { who: "person", roles: READERS } as const;

export const listDerivations = command({
  id: "derivations.list",
  method: "GET",
  path: "/lots/{code}/derivations",
  summary: "Derivations and imports of a lot, newest first",
  access: readers,
  params: byCode,
  query: idPageQuery,
  reply: { status: 200, schema: derivationPage },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => listLotDerivations(ctx, params.code, query),
});

export const addDerivation = command({
  id: "derivations.add",
  method: "POST",
  path: "/lots/{code}/derivations",
  summary: "Derive coefficients from runs; with ?preview=true answers 200 with the result at once and stores nothing",
  access: { who: "person", roles: ["engineer"] },
  params: byCode,
  query: previewQuery,
  body: newDerivation,
  reply: { status: 202, schema: startedDerivation },
  errors: [
    "lot.not_found",
    "run.not_found",
    "run.serial_repeated",
    "derivation.run_of_other_lot",
    "derivation.run_superseded",
    "derivation.no_readings",
    "derivation.exclude_unknown",
  ],
  idempotent: true,
  handle: async (ctx, { params, query, body }) => {
    const input = { ...body, lot: params.code };
    if (query.preview !== "true") return startDerivation(ctx, input);
    const preview = derivationPreview.parse(await previewDerivation(ctx, input));
    return Response.json(preview, { headers: { "cache-control": "no-store" } });
  },
});

export const getDerivation = command({
  id: "derivations.get",
  method: "GET",
  path: "/derivations/{id}",
  summary: "A derivation with its result, findings, makers and decisions",
  access: readers,
  params: byId,
  reply: { status: 200, schema: derivation },
  errors: ["derivation.not_found"],
  handle: (ctx, { params }) => getDerivationView(ctx, params.id),
});

const DEVICE_TYPES = ["application/json", "text/csv", XLSX_TYPE] as const;
const TYPE_OF_FORMAT = { json: DEVICE_TYPES[0], csv: DEVICE_TYPES[1], xlsx: DEVICE_TYPES[2] } as const;

export const listDevices = command({
  id: "derivations.devices",
  method: "GET",
  path: "/derivations/{id}/devices",
  summary: "Devices of a derivation by serial; as text/csv or as a workbook all of them at once",
  access: readers,
  params: byId,
  query: devicesQuery,
  reply: { status: 200, schema: derivedDevicePage, mediaTypes: DEVICE_TYPES },
  errors: ["derivation.not_found", "request.not_acceptable"],
  handle: async (ctx, { params, query, headers }) => {
    const { format, ...page } = query;
    const type = format === undefined ? chooseMediaType(headers, DEVICE_TYPES) : TYPE_OF_FORMAT[format];
    if (type === "application/json") return listDerivedDevices(ctx, params.id, page);
    const isCsv = type === "text/csv";
    const body = isCsv ? await writeDevicesCsv(ctx, params.id) : new Uint8Array(await writeDevicesXlsx(ctx, params.id));
    return new Response(body, {
      headers: {
        "content-type": isCsv ? "text/csv; charset=utf-8" : type,
        "content-disposition": `attachment; filename="coefficients-${params.id}.${isCsv ? "csv" : "xlsx"}"`,
        "cache-control": "no-store",
        vary: "accept",
      },
    });
  },
});

export const compare = command({
  id: "derivations.compare",
  method: "GET",
  path: "/derivations/compare",
  summary:
    "What differs between two derivations of a lot: facts of both, and devices by the effect at capacity, page by page",
  access: readers,
  query: compareDerivationsQuery,
  reply: { status: 200, schema: derivationComparison },
  errors: ["derivation.not_found", "derivation.running", "derivation.wrong_state", "derivation.other_lot"],
  handle: (ctx, { query }) => compareDerivations(ctx, query),
});

export const listPackages = command({
  id: "derivations.packages",
  method: "GET",
  path: "/derivations/{id}/packages",
  summary: "Packages that carry coefficients of a derivation, newest first: what a revocation reaches",
  access: readers,
  params: byId,
  reply: { status: 200, schema: setPackages },
  errors: ["derivation.not_found"],
  handle: (ctx, { params }) => listSetPackages(ctx, params.id),
});

export const getDevice = command({
  id: "derivations.device",
  method: "GET",
  path: "/derivations/{id}/devices/{serial}",
  summary: "One device of a derivation with its points and drift curves",
  access: readers,
  params: z.object({ id, serial: code }),
  reply: { status: 200, schema: derivedDeviceDetail },
  errors: ["derivation.not_found", "coefficients.not_found"],
  handle: (ctx, { params }) => getDerivedDevice(ctx, params.id, params.serial),
});

export const listDerivationFindings = command({
  id: "derivations.findings",
  method: "GET",
  path: "/derivations/{id}/findings",
  summary: "All findings of a derivation, those of the lot first",
  access: readers,
  params: byId,
  query: idPageQuery,
  reply: { status: 200, schema: findingPage },
  errors: ["derivation.not_found"],
  handle: (ctx, { params, query }) => listFindings(ctx, params.id, query),
});

export const decide = command({
  id: "derivations.decide",
  method: "POST",
  path: "/derivations/{id}/decisions",
  summary: "Approve, refuse or revoke coefficients, all of a derivation or those of some devices",
  access: { who: "person", roles: ["reviewer"], session: true },
  params: byId,
  body: derivationDecision,
  reply: { status: 200, schema: derivation },
  errors: [
    "derivation.not_found",
    "derivation.self_approval",
    "derivation.running",
    "derivation.wrong_state",
    "derivation.hard_finding",
    "derivation.not_acknowledged",
    "derivation.serial_unknown",
    "derivation.finding_unknown",
    "auth.password_wrong",
    "auth.code_wrong",
  ],
  handle: (ctx, { params, body }) => decideDerivation(ctx, { ...body, id: params.id }),
});

export const derivationCommands = [
  listDerivations,
  addDerivation,
  getDerivation,
  listDevices,
  getDevice,
  listDerivationFindings,
  listPackages,
  compare,
  decide,
];
