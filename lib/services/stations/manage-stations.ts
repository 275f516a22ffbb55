import { getFamily } from "@/db/queries/families";
import * as query from "@/db/queries/stations";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Page, pageOf } from "@/lib/services/page";
import type { StationChange } from "@/schemas/api/stations";

type StationKeyView = Omit<ReturnType<typeof keyView>, "stationId">;

export interface StationView {
  id: string;
  name: string;
  active: boolean;
  families: string[];
  createdAt: string;
  lastSeenAt: string | null;
  keys: StationKeyView[];
}

function keyView(row: query.StationKeyRow) {
  return {
    id: row.id,
    prefix: row.prefix,
    createdAt: row.createdAt.toISOString(),
    lastUsedAt: row.lastUsedAt?.toISOString() ?? null,
    revokedAt: row.revokedAt?.toISOString() ?? null,
  };
}

function stationView(row: query.StationRow, keys: readonly query.StationKeyRow[]): StationView {
  return {
    ...row,
    createdAt: row.createdAt.toISOString(),
    lastSeenAt: row.lastSeenAt?.toISOString() ?? null,
    keys: keys.filter((key) => key.stationId === row.id).map(keyView),
  };
}

/** Stations with their keys, by name. */
export async function listStations(ctx: Ctx, page: { limit: number; cursor?: string }): Promise<Page<StationView>> {
  const rows = await query.listStations(ctx.db, { ...page, limit: page.limit + 1 });
  const { items, next } = pageOf(rows, page.limit, (row) => row.name);
  const keys = await query.listStationKeys(
    ctx.db,
    items.map((row) => row.id),
  );
  return { items: items.map((row) => stationView(row, keys)), next };
}

/** A station with its keys. @throws AppError `station.not_found` */
export async function getStation(ctx: Ctx, id: string): Promise<StationView> {
  const row = await query.getStation(ctx.db, id);
  return stationView(row, await query.listStationKeys(ctx.db, [id]));
}

async function familiesOf(ctx: Ctx, codes: readonly string[]): Promise<{ ids: string[]; codes: string[] }> {
  const families = await Promise.all([...new Set(codes)].map((code) => getFamily(ctx.db, code)));
  return { ids: families.map((family) => family.id), codes: families.map((family) => family.code) };
}

/** Adds a station that may write lots of the named families. @throws AppError `station.exists`, `family.not_found`, `auth.forbidden` */
export async function addStation(ctx: PersonCtx, input: { name: string; families: string[] }): Promise<StationView> {
  assertRole(ctx, "admin");
  const families = await familiesOf(ctx, input.families);
  const id = ctx.newId();
  await ctx.db.transaction().execute(async (trx) => {
    const station = { id, name: input.name, createdAt: ctx.now(), createdBy: ctx.actor.id };
    await query.insertStation(trx, station, families.ids);
    await appendEvent(ctx, trx, {
      action: "station.added",
      subject: id,
      data: { name: input.name, families: families.codes },
    });
  });
  return getStation(ctx, id);
}

/**
 * Renames a station, changes the families it may write, stops or reopens it. A stopped one is refused at its next call.
 * @throws AppError `station.not_found`, `station.exists`, `family.not_found`, `auth.forbidden`
 */
export async function changeStation(
  ctx: PersonCtx,
  input: { id: string; change: StationChange },
): Promise<StationView> {
  assertRole(ctx, "admin");
  const { families: codes, ...own } = input.change;
  const families = codes && (await familiesOf(ctx, codes));
  await ctx.db.transaction().execute(async (trx) => {
    await query.lockStation(trx, input.id);
    await query.updateStation(trx, input.id, own);
    if (families) await query.replaceStationFamilies(trx, input.id, families.ids);
    await appendEvent(ctx, trx, {
      action: "station.changed",
      subject: input.id,
      data: { ...own, ...(families && { families: families.codes }) },
    });
  });
  return getStation(ctx, input.id);
}
