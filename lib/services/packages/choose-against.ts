import { listLivePeriods } from "@/db/queries/live-periods";
import { findLivePackage, getPackage, listPackages, type PackageRow } from "@/db/queries/packages";
import type { Ctx } from "@/lib/services/context";

export interface Comparable {
  id: string;
  version: string;
  state: string;
  /** RFC 3339; null where it never was. */
  liveSince: string | null;
}

export interface Against {
  /** What a package is compared with where nothing else is asked for; null for a lot's first one. */
  chosen: Comparable | null;
  /** Why it is this one. */
  reason: "live" | "live-before" | "built-before" | "none";
  /** Everything of the lot that has images, newest first, the package itself left out. */
  others: Comparable[];
}

/** A lot's packages that are offered for comparing; more are reached by their address. */
const OFFERED = 200;

/**
 * What a package is compared with: the live one; for one that is or was live, the one that was live before it; else the
 * newest one built before it. @throws AppError `package.not_found`
 */
export async function chooseAgainst(ctx: Ctx, packageId: string): Promise<Against> {
  const pkg = await getPackage(ctx.db, packageId);
  const periods = await listLivePeriods(ctx.db, pkg.lotId);
  const lives = periods.filter((period) => period.kind !== "withdrawal");
  const since = new Map(lives.map((period) => [period.packageId, period.startedAt.toISOString()]));
  const built = (await listPackages(ctx.db, pkg.lotId, { limit: OFFERED })).filter(
    (one) => one.id !== pkg.id && one.state !== "building" && one.state !== "failed",
  );
  const others = built.map((one) => comparableOf(one, since));
  const byId = (id: string | undefined) => others.find((one) => one.id === id) ?? null;

  if (since.has(pkg.id)) {
    const first = lives.find((period) => period.packageId === pkg.id)?.sequence ?? 0;
    const before = lives.findLast((period) => period.sequence < first);
    const chosen = byId(before?.packageId);
    return { chosen, reason: chosen ? "live-before" : "none", others };
  }
  const live = byId((await findLivePackage(ctx.db, pkg.lotId))?.id);
  if (live) return { chosen: live, reason: "live", others };
  const earlier = byId(built.find((one) => one.id < pkg.id)?.id);
  return { chosen: earlier, reason: earlier ? "built-before" : "none", others };
}

function comparableOf(row: PackageRow, since: ReadonlyMap<string, string>): Comparable {
  return { id: row.id, version: row.version, state: row.state, liveSince: since.get(row.id) ?? null };
}
