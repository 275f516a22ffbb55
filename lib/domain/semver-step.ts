import semver from "semver";
import { layoutChanges } from "@/lib/domain/layout-changes";
import { AppError } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";

export type Step = "major" | "minor" | "patch";

/** One difference between two layouts and the version step that it asks for. */
export interface StepReason {
  /** JSON pointer into the newer document, or into the older one for what is gone. */
  path: string;
  step: Step;
  message: string;
}

const RANK: Readonly<Record<Step, number>> = { patch: 0, minor: 1, major: 2 };

/** The larger of two steps. */
export function largerStep(a: Step, b: Step): Step {
  return RANK[a] >= RANK[b] ? a : b;
}

/**
 * The smallest version step that the differences between two layouts allow (contract, section 4): major where firmware
 * for the old one would misread the new image or do other than before, minor where something is only added in space that
 * was fill or the firmware range narrowed, patch for texts and limits.
 * @param previous the newest published lower version; null where there is none.
 * @returns step null where there is nothing to compare with; patch where nothing but the version changed.
 */
export function layoutStep(
  previous: LayoutDocument | null,
  next: LayoutDocument,
): { step: Step | null; reasons: StepReason[] } {
  if (!previous) return { step: null, reasons: [] };
  const reasons = layoutChanges(previous, next);
  return { step: reasons.reduce<Step>((step, reason) => largerStep(step, reason.step), "patch"), reasons };
}

/** The newest version below `version` among published layouts; null where there is none. Precedence as in SemVer 2.0.0, section 11. */
export function newestLower<T extends { version: string }>(published: readonly T[], version: string): T | null {
  const lower = published.filter((one) => semver.lt(one.version, version));
  return lower.sort((a, b) => semver.rcompare(a.version, b.version))[0] ?? null;
}

/** The step from one version to a higher one; undefined where it is not higher. */
export function findStepBetween(previous: string, version: string): Step | undefined {
  if (!semver.gt(version, previous)) return undefined;
  if (semver.major(version) > semver.major(previous)) return "major";
  return semver.minor(version) > semver.minor(previous) ? "minor" : "patch";
}

/**
 * Refuses a version whose step from the previous one is smaller than the differences ask for.
 * @throws AppError `layout.step_too_small` {previous, version, step, needed}: needed is the smallest version that would do.
 */
export function assertStepCovers(previous: string | null, version: string, step: Step | null): void {
  if (previous === null || step === null) return;
  const taken = findStepBetween(previous, version);
  if (taken !== undefined && RANK[taken] >= RANK[step]) return;
  const needed = semver.inc(previous, step);
  const message = `The differences to ${previous} ask for a ${step} step: ${needed} or higher, not ${version}`;
  throw new AppError("layout.step_too_small", { previous, version, step, needed, message });
}

/** What of a package its version rests on. */
export interface PackageForVersion {
  layoutVersion: string;
  /** In any order. */
  serials: readonly string[];
}

/**
 * The number of a lot's next package (contract, section 6): 1.0.0 first; major where the layout's major changed, minor
 * where layout or devices changed, else patch; a step asked for may raise it, never lower it.
 * @param previous the lot's package with the highest version, whatever became of it, as numbers are never reused.
 * @param step the step that the engineer asked for, if any.
 */
export function nextPackageVersion(
  previous: (PackageForVersion & { version: string }) | null,
  next: PackageForVersion,
  step?: Step,
): string {
  if (!previous) return "1.0.0";
  const computed = packageStep(previous, next);
  return semver.inc(previous.version, step ? largerStep(computed, step) : computed) as string;
}

function packageStep(previous: PackageForVersion, next: PackageForVersion): Step {
  if (semver.major(previous.layoutVersion) !== semver.major(next.layoutVersion)) return "major";
  if (previous.layoutVersion !== next.layoutVersion) return "minor";
  const before = new Set(previous.serials);
  const same = before.size === new Set(next.serials).size && next.serials.every((serial) => before.has(serial));
  return same ? "patch" : "minor";
}
