import { READERS } from "@/lib/domain/roles";
import { noteAccess } from "@/lib/services/access/note-access";
import { getBundle, getManifest } from "@/lib/services/packages/read-bundle";
import { getStationBundle } from "@/lib/services/stations/get-station-bundle";
import { byId } from "@/schemas/api/common";
import { bytesResponse } from "../bytes-response";
import { command } from "../command";

const readers = { who: "person", roles: READERS } as const;

export const packageManifest = command({
  id: "packages.manifest",
  method: "GET",
  path: "/packages/{id}/manifest",
  summary: "manifest.json, byte by byte; its SHA-256 is the package digest",
  access: readers,
  params: byId,
  reply: { status: 200, mediaTypes: ["application/json"], description: "Exact bytes; ETag, Repr-Digest, one range" },
  errors: ["package.not_found", "package.not_built", "request.range_invalid"],
  handle: async (ctx, { params, headers }) => {
    const manifest = await getManifest(ctx, params.id);
    await noteAccess(ctx, "download", { what: "manifest", package: params.id });
    return bytesResponse(headers, manifest);
  },
});

export const packageBundle = command({
  id: "packages.bundle",
  method: "GET",
  path: "/packages/{id}/bundle",
  summary:
    "The bundle: signed where the package is or was live, else a preview; of a withdrawn package for auditors only",
  access: readers,
  params: byId,
  reply: { status: 200, mediaTypes: ["application/zip"], description: "Exact bytes; ETag, Repr-Digest, one range" },
  errors: ["package.not_found", "package.not_built", "package.withdrawn", "request.range_invalid"],
  handle: async (ctx, { params, headers }) => {
    const bundle = await getBundle(ctx, params.id);
    await noteAccess(ctx, "download", { what: "bundle", package: params.id });
    return bytesResponse(headers, bundle);
  },
});

export const stationBundle = command({
  id: "station.bundle",
  method: "GET",
  path: "/station/packages/{id}/bundle",
  summary: "The signed bundle of a live package of the station's families",
  access: { who: "station" },
  params: byId,
  reply: { status: 200, mediaTypes: ["application/zip"], description: "Exact bytes; ETag, Repr-Digest, one range" },
  errors: ["package.not_found", "station.family_not_allowed", "station.package_not_live", "request.range_invalid"],
  handle: async (ctx, { params, headers }) => {
    const bundle = await getStationBundle(ctx, params.id);
    await noteAccess(ctx, "download", { what: "bundle", package: params.id });
    return bytesResponse(headers, bundle);
  },
});

export const bundleCommands = [packageManifest, packageBundle, stationBundle];
