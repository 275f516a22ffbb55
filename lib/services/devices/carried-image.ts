import { compareImages } from "@/builders/codec/difference";
import { listImageBytes } from "@/db/queries/images";
import { findLivePackage } from "@/db/queries/packages";
import { type CarriedRow, listCarried } from "@/db/queries/writes";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "./layouts-of-packages";

export interface Carried {
  serial: string;
  held: boolean;
  scrapped: boolean;
  shipped: boolean;
  /** Null where nothing was ever reported. */
  last: {
    packageId: string | null;
    version: string | null;
    imageSha256: string | null;
    finishedAt: string;
    station: string;
    outcome: string;
  } | null;
  /** What the memory holds is known: the deciding record is verified and no board was replaced since. */
  known: boolean;
  live: boolean;
  /** The live package has an image of this device. */
  inLive: boolean;
  /** Equal to the live image in everything but version numbers; null where there is nothing to compare. */
  sameValuesAsLive: boolean | null;
}

/** What devices of a lot carry, compared with what is live, by serial. */
export async function listCarriedImages(
  ctx: Ctx,
  input: { lotId: string; after?: string; limit: number; serial?: string },
): Promise<Carried[]> {
  const rows = await listCarried(ctx.db, input.lotId, input);
  const live = await findLivePackage(ctx.db, input.lotId);
  const serials = rows.map((row) => row.serial);
  const liveBytes = live ? await listImageBytes(ctx.db, live.id, serials) : new Map<string, Buffer>();
  const packageIds = [...new Set(rows.flatMap((row) => (row.packageId ? [row.packageId] : [])))];
  const layouts = await layoutsOfPackages(ctx.db, live ? [...packageIds, live.id] : packageIds);
  const bytesOf = new Map<string, Map<string, Buffer>>();
  for (const packageId of packageIds) {
    if (packageId !== live?.id) bytesOf.set(packageId, await listImageBytes(ctx.db, packageId, serials));
  }
  const sameValues = (row: CarriedRow): boolean | null => {
    const target = liveBytes.get(row.serial);
    if (!live || !target || !row.packageId) return null;
    if (row.packageId === live.id) return true;
    const carried = bytesOf.get(row.packageId)?.get(row.serial);
    const [from, to] = [layouts.get(row.packageId), layouts.get(live.id)];
    if (!carried || !from || !to) return null;
    return compareImages({ layout: from, bytes: carried }, { layout: to, bytes: target }).change !== "values";
  };
  return rows.map((row) => {
    const known =
      row.outcome === "verified" && !(row.boardReplacedAt && row.finishedAt && row.boardReplacedAt >= row.finishedAt);
    return {
      serial: row.serial,
      held: row.held,
      scrapped: row.scrapped,
      shipped: row.shipped,
      last:
        row.writeId && row.finishedAt
          ? {
              packageId: row.packageId,
              version: row.version,
              imageSha256: row.imageSha256?.toString("hex") ?? null,
              finishedAt: row.finishedAt.toISOString(),
              station: row.station ?? "",
              outcome: row.outcome ?? "",
            }
          : null,
      known,
      live: known && live !== undefined && row.packageId === live.id,
      inLive: liveBytes.has(row.serial),
      sameValuesAsLive: known ? sameValues(row) : null,
    };
  });
}
