import semver from "semver";
import { nextPackageVersion, type PackageForVersion, type Step } from "@/lib/domain/semver-step";

export interface PackageNumbering {
  /** The highest version of the lot, whatever became of that package; null before the first. */
  highest: string | null;
  /** The newest package that was built or is being built; null where there is none. */
  compared: (PackageForVersion & { version: string }) | null;
  next: PackageForVersion;
  /** Asked for by the engineer; raises the step, never lowers it. */
  step?: Step | undefined;
}

/**
 * The number of a lot's next package. The step is taken from the newest package that has devices to compare with; a number
 * that a failed build used up already is passed over, as numbers are never given twice.
 */
export function numberPackage({ highest, compared, next, step }: PackageNumbering): string {
  const wanted = nextPackageVersion(compared, next, step);
  if (highest === null || semver.gt(wanted, highest)) return wanted;
  return semver.inc(highest, "patch") as string;
}
