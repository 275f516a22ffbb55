import { countImages } from "@/db/queries/images";
import { getLot } from "@/db/queries/lots";
import { findLivePackage } from "@/db/queries/packages";
import { countWrites, listFirstVerified, type WriteCounts } from "@/db/queries/write-progress";
import type { Ctx } from "@/lib/services/context";

/** Points a curve is drawn with at most. */
const POINTS_MAX = 200;

/** Devices verified so far, over time. */
export interface ProgressPoint {
  at: string;
  devices: number;
}

export interface WriteProgress {
  live: { package: string; version: string; devices: number; verified: number } | null;
  counts: WriteCounts;
  /** Devices verified with any package of the lot, and with the live one. */
  anyPackage: ProgressPoint[];
  livePackage: ProgressPoint[];
}

/** How the writing of a lot goes. @throws AppError `lot.not_found` */
export async function getWriteProgress(ctx: Ctx, codeOrId: string): Promise<WriteProgress> {
  const lot = await getLot(ctx.db, codeOrId);
  const live = await findLivePackage(ctx.db, lot.id);
  const verified = live ? await listFirstVerified(ctx.db, lot.id, live.id) : [];
  return {
    live: live
      ? {
          package: live.id,
          version: live.version,
          devices: await countImages(ctx.db, live.id),
          verified: verified.length,
        }
      : null,
    counts: await countWrites(ctx.db, lot.id),
    anyPackage: curveOf(await listFirstVerified(ctx.db, lot.id)),
    livePackage: curveOf(verified),
  };
}

/** A rising curve through so many moments, thinned out; it begins at nothing and ends at all of them. */
function curveOf(moments: readonly Date[]): ProgressPoint[] {
  const first = moments[0];
  if (!first) return [];
  const step = Math.max(1, Math.ceil(moments.length / POINTS_MAX));
  const points = moments
    .map((at, index) => ({ at: at.toISOString(), devices: index + 1 }))
    .filter(({ devices }) => devices % step === 0 || devices === moments.length);
  return [{ at: first.toISOString(), devices: 0 }, ...points];
}
