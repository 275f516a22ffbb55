import type { PackageRow } from "@/db/queries/packages";
import type { LeftOutReason } from "@/lib/domain/package-selection";
import { type Selection, serialsSha256 } from "./choose-sets";

/** What a package keeps about its devices beside the images. */
export interface PackageCounts {
  /** Packed devices. */
  devices: number;
  lotDevices: number;
  leftOut: Partial<Record<LeftOutReason, number>>;
  /** Of the list of serials, so that the next package's step is found without reading it. */
  serialsSha256: string;
}

/** The counts of a selection. */
export function countSelection(selection: Selection): PackageCounts {
  const leftOut: PackageCounts["leftOut"] = {};
  for (const { reason } of selection.leftOut) leftOut[reason] = (leftOut[reason] ?? 0) + 1;
  return {
    devices: selection.packed.length,
    lotDevices: selection.lotDevices,
    leftOut,
    serialsSha256: serialsSha256(selection.packed),
  };
}

/** The counts that a package keeps. */
export function countsOf(pkg: Pick<PackageRow, "counts">): PackageCounts {
  return pkg.counts as unknown as PackageCounts;
}
