import { getLot } from "@/db/queries/lots";
import { getPackage } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import type { StationCtx } from "@/lib/services/context";
import { storedBundle } from "@/lib/services/packages/read-bundle";
import type { StoredBytes } from "@/lib/services/stored-bytes";

/**
 * The signed bundle of a live package, for a station that may write its family. Previews, superseded and withdrawn packages are refused.
 * @throws AppError `package.not_found`, `station.family_not_allowed`, `station.package_not_live`
 */
export async function getStationBundle(ctx: StationCtx, packageId: string): Promise<StoredBytes> {
  const pkg = await getPackage(ctx.db, packageId);
  const lot = await getLot(ctx.db, pkg.lotId);
  if (!ctx.actor.familyIds.includes(lot.familyId)) {
    throw new AppError("station.family_not_allowed", {
      family: lot.familyCode,
      message: `This station may not write family ${lot.familyCode}; an admin can allow it.`,
    });
  }
  if (pkg.state !== "live") {
    throw new AppError("station.package_not_live", {
      state: pkg.state,
      message: `Package ${pkg.version} of lot ${lot.code} is not live. Ask for what is live and write that.`,
    });
  }
  return storedBundle(ctx, pkg);
}
