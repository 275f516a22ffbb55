import { createHash, randomBytes } from "node:crypto";
import { getFamily } from "@/db/queries/families";
import * as query from "@/db/queries/stations";
import { STATION_KEY_PREFIX } from "@/lib/domain/credentials";
import { AppError } from "@/lib/errors";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Page, pageOf } from "@/lib/services/page";

export type StationView = query.StationRow & { keys: query.StationKeyRow[] };

/** Stations with their keys, by name. */
export async function listStations(ctx: Ctx, page: { limit: number; cursor?: string }): Promise<Page<StationView>> {
  const rows = await query.listStations(ctx.db, { ...page, limit: page.limit + 1 });
  const cut = pageOf(rows, page.limit, (row) => row.name);
  const items = await Promise.all(
    cut.items.map(async (row) => ({ ...row, keys: await query.listStationKeys(ctx.db, row.id) })),
  );
  return { items, next: cut.next };
}

/** Adds a station that may write lots of the named families. @throws AppError `station.exists`, `family.not_found`, `auth.forbidden` */
export async function addStation(ctx: PersonCtx, input: { name: string; families: string[] }): Promise<StationView> {
  assertRole(ctx, "admin");
  const families = await Promise.all(input.families.map((code) => getFamily(ctx.db, code)));
  const id = ctx.newId();
  await ctx.db.transaction().execute(async (trx) => {
    const station = { id, name: input.name, createdAt: ctx.now(), createdBy: ctx.actor.id };
    await query.insertStation(trx, station, [...new Set(families.map((family) => family.id))]);
    await appendEvent(ctx, trx, {
      action: "station.added",
      subject: id,
      data: { name: input.name, families: families.map((family) => family.code) },
    });
  });
  return { ...(await query.getStation(ctx.db, id)), keys: [] };
}

/** Makes a key for a station. The key is returned this once; what is stored is its SHA-256. @throws AppError `station.not_found` */
export async function addStationKey(
  ctx: PersonCtx,
  stationId: string,
): Promise<{ id: string; key: string; prefix: string }> {
  assertRole(ctx, "admin");
  const key = STATION_KEY_PREFIX + randomBytes(32).toString("base64url");
  const id = ctx.newId();
  const prefix = key.slice(0, STATION_KEY_PREFIX.length + 6);
  await query.getStation(ctx.db, stationId);
  await ctx.db.transaction().execute(async (trx) => {
    const keyHash = createHash("sha256").update(key).digest();
    await query.insertStationKey(trx, {
      id,
      stationId,
      keyHash,
      prefix,
      createdAt: ctx.now(),
      createdBy: ctx.actor.id,
    });
    await appendEvent(ctx, trx, { action: "station-key.made", subject: stationId, data: { key: id, prefix } });
  });
  return { id, key, prefix };
}

/** Revokes a station's key at once. @throws AppError `key.not_found` */
export async function revokeStationKey(ctx: PersonCtx, input: { stationId: string; key: string }): Promise<void> {
  assertRole(ctx, "admin");
  await ctx.db.transaction().execute(async (trx) => {
    const { stationId, key } = input;
    const revoked = await query.revokeStationKey(trx, {
      id: key,
      stationId,
      revokedAt: ctx.now(),
      revokedBy: ctx.actor.id,
    });
    if (!revoked)
      throw new AppError("key.not_found", { key, message: "The station has no such key, or it was revoked before." });
    await appendEvent(ctx, trx, { action: "station-key.revoked", subject: stationId, data: { key } });
  });
}
