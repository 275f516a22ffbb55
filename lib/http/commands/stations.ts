import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { listLive } from "@/lib/services/stations/list-live";
import { listStationWrites } from "@/lib/services/stations/list-writes";
import * as manage from "@/lib/services/stations/manage-stations";
import { recordWrites } from "@/lib/services/stations/record-writes";
import * as keys from "@/lib/services/stations/station-keys";
import { byId, pageQuery } from "@/schemas/api/common";
import {
  byStationKey,
  listedWritePage,
  newStation,
  newStationKey,
  station,
  stationChange,
  stationKeyRequest,
  stationLive,
  stationPage,
  writeQuery,
  writeReports,
  writeResults,
} from "@/schemas/api/stations";

const readers = { who: "person", roles: READERS } as const;
const admin = { who: "person", roles: ["admin"], session: true } as const;

export const listStations = command({
  id: "stations.list",
  method: "GET",
  path: "/stations",
  summary: "Stations with their keys, by name",
  access: readers,
  query: pageQuery,
  reply: { status: 200, schema: stationPage },
  handle: (ctx, { query }) => manage.listStations(ctx, query),
});

export const createStation = command({
  id: "stations.create",
  method: "POST",
  path: "/stations",
  summary: "Adds a station and names the families it may write",
  access: admin,
  body: newStation,
  reply: { status: 201, schema: station },
  errors: ["station.exists", "family.not_found"],
  idempotent: true,
  handle: (ctx, { body }) => manage.addStation(ctx, body),
});

export const getStation = command({
  id: "stations.get",
  method: "GET",
  path: "/stations/{id}",
  summary: "A station with its keys",
  access: readers,
  params: byId,
  reply: { status: 200, schema: station },
  errors: ["station.not_found"],
  handle: (ctx, { params }) => manage.getStation(ctx, params.id),
});

export const changeStation = command({
  id: "stations.change",
  method: "PATCH",
  path: "/stations/{id}",
  summary: "Renames a station, changes its families, stops or reopens it",
  access: admin,
  params: byId,
  body: stationChange,
  reply: { status: 200, schema: station },
  errors: ["station.not_found", "station.exists", "family.not_found"],
  handle: (ctx, { params, body }) => manage.changeStation(ctx, { id: params.id, change: body }),
});

export const createStationKey = command({
  id: "stations.create-key",
  method: "POST",
  path: "/stations/{id}/keys",
  summary: "Makes a key for a station; it is shown this once",
  access: admin,
  params: byId,
  body: stationKeyRequest,
  reply: { status: 201, schema: newStationKey },
  errors: ["station.not_found", "auth.password_wrong", "auth.code_wrong"],
  handle: (ctx, { params, body }) => keys.addStationKey(ctx, { ...body, stationId: params.id }),
});

export const revokeStationKey = command({
  id: "stations.revoke-key",
  method: "DELETE",
  path: "/stations/{id}/keys/{key}",
  summary: "Revokes a station's key at once",
  access: admin,
  params: byStationKey,
  reply: { status: 204 },
  errors: ["key.not_found"],
  handle: async (ctx, { params }) => {
    await keys.revokeStationKey(ctx, { stationId: params.id, key: params.key });
    return new Response(null, { status: 204 });
  },
});

export const listWritesOfStation = command({
  id: "stations.list-writes",
  method: "GET",
  path: "/stations/{id}/writes",
  summary: "What a station reported, newest received first",
  access: readers,
  params: byId,
  query: writeQuery,
  reply: { status: 200, schema: listedWritePage },
  errors: ["station.not_found"],
  handle: (ctx, { params, query }) => listStationWrites(ctx, { ...query, station: params.id }),
});

export const getStationLive = command({
  id: "station.live",
  method: "GET",
  path: "/station/live",
  summary: "What this station may write now",
  access: { who: "station" },
  reply: { status: 200, schema: stationLive },
  handle: (ctx) => listLive(ctx),
});

export const reportWrites = command({
  id: "station.report-writes",
  method: "POST",
  path: "/station/writes",
  summary: "Takes what a station wrote; the same record twice counts once",
  access: { who: "station" },
  body: writeReports,
  reply: { status: 200, schema: writeResults },
  handle: (ctx, { body }) => recordWrites(ctx, body.writes),
});

export const stationCommands = [
  listStations,
  createStation,
  getStation,
  changeStation,
  createStationKey,
  revokeStationKey,
  listWritesOfStation,
  getStationLive,
  reportWrites,
];
