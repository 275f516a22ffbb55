import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import * as service from "@/lib/services/equipment/keep-equipment";
import * as use from "@/lib/services/equipment/list-equipment-use";
import { byCodeOrId, idPageQuery, pageQuery } from "@/schemas/api/common";
import { equipment, equipmentChange, equipmentList, equipmentUsePage, newEquipment } from "@/schemas/api/equipment";

export const listEquipment = command({
  id: "equipment.list",
  method: "GET",
  path: "/equipment",
  summary: "Sensors, chambers, loads and readers by code",
  access: { who: "person", roles: READERS },
  query: pageQuery,
  reply: { status: 200, schema: equipmentList },
  handle: (ctx, { query }) => service.listEquipment(ctx, query),
});

export const getEquipment = command({
  id: "equipment.get",
  method: "GET",
  path: "/equipment/{code}",
  summary: "A piece of equipment with its certificate",
  access: { who: "person", roles: READERS },
  params: byCodeOrId,
  reply: { status: 200, schema: equipment },
  errors: ["equipment.not_found"],
  handle: (ctx, { params }) => service.getEquipment(ctx, params.code),
});

export const listEquipmentUse = command({
  id: "equipment.list-runs",
  method: "GET",
  path: "/equipment/{code}/runs",
  summary: "Runs that used a piece of equipment, newest first, with its certificate as of each",
  access: { who: "person", roles: READERS },
  params: byCodeOrId,
  query: idPageQuery,
  reply: { status: 200, schema: equipmentUsePage },
  errors: ["equipment.not_found"],
  handle: (ctx, { params, query }) => use.listEquipmentUse(ctx, params.code, query),
});

export const addEquipment = command({
  id: "equipment.add",
  method: "POST",
  path: "/equipment",
  summary: "Adds a piece of equipment with its certificate",
  access: { who: "person", roles: ["engineer"] },
  body: newEquipment,
  reply: { status: 201, schema: equipment },
  errors: ["equipment.exists"],
  idempotent: true,
  handle: (ctx, { body }) => service.addEquipment(ctx, body),
});

export const changeEquipment = command({
  id: "equipment.change",
  method: "PATCH",
  path: "/equipment/{code}",
  summary: "Changes a certificate, its date, uncertainty or a chamber's places",
  access: { who: "person", roles: ["engineer"] },
  params: byCodeOrId,
  body: equipmentChange,
  reply: { status: 200, schema: equipment },
  errors: ["equipment.not_found", "equipment.not_a_chamber"],
  handle: (ctx, { params, body }) => service.changeEquipment(ctx, params.code, body),
});

export const equipmentCommands = [listEquipment, addEquipment, changeEquipment, getEquipment, listEquipmentUse];
