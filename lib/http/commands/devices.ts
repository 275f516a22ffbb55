import { READERS } from "@/lib/domain/roles";
import { command, type Upload } from "@/lib/http/command";
import { listRewrites as rewrites } from "@/lib/services/devices/list-rewrites";
import { recordDeviceEvent } from "@/lib/services/devices/record-device-event";
import { listLotWrites } from "@/lib/services/stations/list-writes";
import { checkDump } from "@/lib/services/trace/check-dump";
import { getDeviceTrace } from "@/lib/services/trace/get-device-trace";
import { listImpact as impact } from "@/lib/services/trace/list-impact";
import { byCodeOrId, pageQuery } from "@/schemas/api/common";
import {
  bySerial,
  DUMP_MAX_BYTES,
  deviceEvent,
  deviceTrace,
  dumpResult,
  HEX_TYPES,
  impactPage,
  impactQuery,
  newDeviceEvent,
  RAW_TYPE,
  rewritePage,
} from "@/schemas/api/devices";
import { listedWritePage, writeQuery } from "@/schemas/api/stations";

const readers = { who: "person", roles: READERS } as const;
const dumpers = { who: "person", roles: ["engineer", "reviewer", "service"], reads: true } as const;
const dump = { upload: { contentTypes: [...HEX_TYPES, RAW_TYPE], maxBytes: DUMP_MAX_BYTES } };
const dumpErrors = ["dump.empty", "dump.wrong_length", "dump.incomplete", "hex.bad_checksum", "hex.overlap"];
const dumpOf = ({ bytes, contentType }: Upload) => ({
  bytes,
  format: contentType === RAW_TYPE ? ("raw" as const) : ("hex" as const),
});

export const getDevice = command({
  id: "devices.get",
  method: "GET",
  path: "/devices/{serial}",
  summary: "What a serial carries, where that came from, and what happened to it",
  access: { who: "person", roles: [...READERS, "operator"] },
  params: bySerial,
  reply: { status: 200, schema: deviceTrace },
  errors: ["device.not_found"],
  handle: (ctx, { params }) => getDeviceTrace(ctx, params.serial),
});

export const createDeviceEvent = command({
  id: "devices.record-event",
  method: "POST",
  path: "/devices/{serial}/events",
  summary: "Records what happened to a device; hold and resume are signed, and resume takes a second person",
  access: { who: "person", roles: ["engineer", "service"] },
  params: bySerial,
  body: newDeviceEvent,
  reply: { status: 201, schema: deviceEvent },
  errors: [
    "device.not_found",
    "device.wrong_state",
    "device.self_approval",
    "auth.session_required",
    "auth.password_wrong",
    "auth.code_wrong",
  ],
  idempotent: true,
  handle: (ctx, { params, body }) => recordDeviceEvent(ctx, { serial: params.serial, event: body }),
});

export const checkDeviceDump = command({
  id: "devices.check-dump",
  method: "POST",
  path: "/devices/{serial}/dump",
  summary: "Says which image a memory dump of this device is, or which bytes and parameters differ",
  access: dumpers,
  params: bySerial,
  body: dump,
  reply: { status: 200, schema: dumpResult },
  errors: ["device.not_found", ...dumpErrors],
  handle: (ctx, { params, body }) => checkDump(ctx, { serial: params.serial, ...dumpOf(body) }),
});

export const checkAnyDump = command({
  id: "dumps.check",
  method: "POST",
  path: "/dumps",
  summary: "Says whose image a memory dump is",
  access: dumpers,
  body: dump,
  reply: { status: 200, schema: dumpResult },
  errors: dumpErrors,
  handle: (ctx, { body }) => checkDump(ctx, dumpOf(body)),
});

export const listRewrites = command({
  id: "lots.list-rewrites",
  method: "GET",
  path: "/lots/{code}/rewrites",
  summary: "Devices whose last record is not a verified image equal in values to the live one, by serial",
  access: readers,
  params: byCodeOrId,
  query: pageQuery,
  reply: { status: 200, schema: rewritePage },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => rewrites(ctx, { ...query, lot: params.code }),
});

export const listWritesOfLot = command({
  id: "lots.list-writes",
  method: "GET",
  path: "/lots/{code}/writes",
  summary: "What stations reported about a lot's devices, newest received first",
  access: readers,
  params: byCodeOrId,
  query: writeQuery,
  reply: { status: 200, schema: listedWritePage },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => listLotWrites(ctx, { ...query, lot: params.code }),
});

export const listImpact = command({
  id: "trace.impact",
  method: "GET",
  path: "/trace/impact",
  summary: "Serials that one run, derivation, layout, package or piece of equipment reached",
  access: readers,
  query: impactQuery,
  reply: { status: 200, schema: impactPage },
  errors: ["trace.source_missing", "run.not_found", "package.not_found", "equipment.not_found"],
  handle: (ctx, { query }) => impact(ctx, query),
});

export const deviceCommands = [
  getDevice,
  createDeviceEvent,
  checkDeviceDump,
  checkAnyDump,
  listRewrites,
  listWritesOfLot,
  listImpact,
];
