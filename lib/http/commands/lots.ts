import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { addDevices as add } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import * as read from "@/lib/services/lots/get-lot";
import { byCodeOrId } from "@/schemas/api/common";
import {
  addedDevices,
  deviceQuery,
  lot,
  lotDeviceList,
  lotList,
  lotQuery,
  newDevices,
  newLot,
} from "@/schemas/api/lots";

const readers = { who: "person", roles: READERS } as const;
const engineer = { who: "person", roles: ["engineer"] } as const;

export const listLots = command({
  id: "lots.list",
  method: "GET",
  path: "/lots",
  summary: "Lots, newest first",
  access: readers,
  query: lotQuery,
  reply: { status: 200, schema: lotList },
  errors: ["family.not_found"],
  handle: (ctx, { query }) => read.listLots(ctx, query),
});

export const createLot = command({
  id: "lots.create",
  method: "POST",
  path: "/lots",
  summary: "Adds a lot and pins the family's newest published revision",
  access: engineer,
  body: newLot,
  reply: { status: 201, schema: lot },
  errors: ["family.not_found", "family.no_published_revision", "lot.exists"],
  idempotent: true,
  handle: async (ctx, { body }) => read.getLot(ctx, await addLot(ctx, body)),
});

export const getLot = command({
  id: "lots.get",
  method: "GET",
  path: "/lots/{code}",
  summary: "A lot",
  access: readers,
  params: byCodeOrId,
  reply: { status: 200, schema: lot },
  errors: ["lot.not_found"],
  handle: (ctx, { params }) => read.getLot(ctx, params.code),
});

export const addDevices = command({
  id: "lots.add-devices",
  method: "POST",
  path: "/lots/{code}/devices",
  summary: "Adds serials to a lot, with their batches where known, all or none",
  access: engineer,
  params: byCodeOrId,
  body: newDevices,
  reply: { status: 200, schema: addedDevices },
  errors: ["lot.not_found", "device.in_other_lot", "device.batch_differs", "lot.too_many_devices"],
  idempotent: true,
  handle: (ctx, { params, body }) => add(ctx, { ...body, lot: params.code }),
});

export const listLotDevices = command({
  id: "lots.list-devices",
  method: "GET",
  path: "/lots/{code}/devices",
  summary: "A lot's devices by serial",
  access: readers,
  params: byCodeOrId,
  query: deviceQuery,
  reply: { status: 200, schema: lotDeviceList },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => read.listLotDevices(ctx, { ...query, lot: params.code }),
});

export const lotCommands = [listLots, createLot, getLot, addDevices, listLotDevices];
