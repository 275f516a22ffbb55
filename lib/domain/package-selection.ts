/** Which coefficient set of a device a package takes, and why a device is left out (contract, section 6). */

export const LEFT_OUT_REASONS = [
  "scrapped",
  "held",
  "excluded",
  "no-coefficients",
  "undecided",
  "refused",
  "stale",
  "revoked",
  "other-order",
  "other-revision",
] as const;

export type LeftOutReason = (typeof LEFT_OUT_REASONS)[number];

export interface DeviceForPackage {
  held: boolean;
  scrapped: boolean;
  /** Whether a derivation left it out by name. */
  excluded: boolean;
}

/** A set as the choice sees it. */
export interface SetForPackage {
  state: "proposed" | "approved" | "refused" | "stale" | "revoked";
  order: 1 | 2;
  familyRevisionId: string;
}

export interface PackageRequirements {
  /** Of the layout. */
  order: 1 | 2;
  /** That the lot pins. */
  familyRevisionId: string;
}

/**
 * Chooses between a device's newest set of any state and its newest one that was ever approved.
 * A refused or undecided set leaves the approved one before it in force; a stale or revoked one does not fall back to
 * what it had replaced.
 * @param newest the newest set with values; undefined where the device has none.
 * @param decided the newest set that is approved, stale or revoked; undefined where there is none.
 * @returns the set to pack, and whether a newer one waits for a decision; or why the device is left out.
 */
export function chooseSet<S extends SetForPackage>(
  device: DeviceForPackage,
  newest: S | undefined,
  decided: S | undefined,
  needs: PackageRequirements,
): { set: S; newerUndecided: boolean } | { leftOut: LeftOutReason } {
  if (device.scrapped) return { leftOut: "scrapped" };
  if (device.held) return { leftOut: "held" };
  if (!newest) return { leftOut: device.excluded ? "excluded" : "no-coefficients" };
  if (!decided) return { leftOut: newest.state === "refused" ? "refused" : "undecided" };
  if (decided.state === "stale" || decided.state === "revoked") {
    return { leftOut: newest.state === "proposed" ? "undecided" : decided.state };
  }
  if (decided.familyRevisionId !== needs.familyRevisionId) return { leftOut: "other-revision" };
  if (decided.order !== needs.order) return { leftOut: "other-order" };
  return { set: decided, newerUndecided: newest.state === "proposed" };
}
