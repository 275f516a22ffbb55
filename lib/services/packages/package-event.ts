import type { PackageRow } from "@/db/queries/packages";

/** What every event of a package names. */
export function packageEventData(pkg: PackageRow, more: Record<string, unknown> = {}): Record<string, unknown> {
  return { lot: pkg.lotCode, version: pkg.version, digest: pkg.digest?.toString("hex") ?? null, ...more };
}
