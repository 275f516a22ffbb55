import { listStationLots } from "@/db/queries/stations";
import { noteAccess } from "@/lib/services/access/note-access";
import type { StationCtx } from "@/lib/services/context";

/** A station that hears nothing newer for this long stops writing: one day, so that a night's lost line does not stop a shift. */
export const LIVE_VALID_MS = 24 * 60 * 60 * 1000;

/** What a station may write now: for each lot of its families that ever had a release, the live package or null. */
export async function listLive(ctx: StationCtx) {
  await noteAccess(ctx, "station.poll");
  const rows = await listStationLots(ctx.db, ctx.actor.familyIds);
  const items = rows.map((row) => ({
    lot: row.lot,
    family: row.family,
    package: row.packageId,
    version: row.version,
    digest: row.digest?.toString("hex") ?? null,
    sequence: row.sequence,
    devices: row.devices,
    held: row.held,
  }));
  return { items, validUntil: new Date(ctx.now().getTime() + LIVE_VALID_MS).toISOString() };
}
