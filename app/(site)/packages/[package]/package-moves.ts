import type { ButtonLook } from "@/app/_components/button";
import type { Role } from "@/lib/domain/roles";
import type { PackageView } from "@/schemas/api/packages";

export type ActionName = "cancel" | "submit" | "take-back" | "release" | "withdraw" | "reinstate";

/** A button of the title row: a move, perhaps with what stands against it, or a link. */
export type ShownAction =
  | { move: ActionName; hindrance?: string }
  | { href: string; words: string; look?: ButtonLook; download?: boolean };

export type PackageForMoves = Pick<
  PackageView,
  "id" | "lot" | "state" | "version" | "checks" | "waivers" | "mayDecide" | "mayTakeBack" | "against"
>;

/** What a person can do with a package in its state: at most two things, the likelier one last. */
export function movesOf(pkg: PackageForMoves, roles: readonly Role[], reinstatementOpen: boolean): ShownAction[] {
  const engineer = roles.includes("engineer");
  const releases = engineer || roles.includes("reviewer");
  const again: ShownAction[] = engineer
    ? [{ href: `/lots/${encodeURIComponent(pkg.lot)}/packages#build`, words: "Build again" }]
    : [];
  const bundle: ShownAction = { href: `/api/v1/packages/${pkg.id}/bundle`, words: "Download bundle", download: true };
  const takeBack: ShownAction[] = pkg.mayTakeBack ? [{ move: "take-back" }] : [];
  switch (pkg.state) {
    case "building":
      return engineer ? [{ move: "cancel" }] : [];
    case "draft":
      return engineer ? [...again, { move: "submit", hindrance: hindranceOf(pkg) }] : [];
    case "in-review":
      if (!pkg.mayDecide) return takeBack;
      return [...takeBack, { href: `/packages/${pkg.id}/review`, words: `Review ${pkg.version}`, look: "primary" }];
    case "approved":
      return releases ? [...takeBack, { move: "release" }] : takeBack;
    case "live":
      return releases ? [bundle, { move: "withdraw" }] : [bundle];
    case "superseded":
      return releases ? [bundle, { move: "reinstate", hindrance: reinstatementOpen ? waits : undefined }] : [bundle];
    case "withdrawn":
      return roles.includes("auditor") ? [...again, bundle] : again;
    case "failed":
    case "refused":
      return again;
    default:
      return [];
  }
}

const waits = "A reinstatement of this lot waits for a decision already.";

/** What stands against asking for review, in words; undefined where nothing does. */
export function hindranceOf({ checks, waivers }: Pick<PackageView, "checks" | "waivers">): string | undefined {
  if (checks.some((check) => check.verdict === "fail")) return "A check fails: mend what it names and build again.";
  const open = openWarnings({ checks, waivers });
  if (open.length === 0) return undefined;
  return open.length === 1
    ? "One warning has no waiver yet: a reviewer who had no hand in the package waives it, or mend it and build again."
    : `${open.length} warnings have no waiver yet: a reviewer who had no hand in the package waives them, or mend them and build again.`;
}

/** Warnings that nobody has waived. */
export function openWarnings({ checks, waivers }: Pick<PackageView, "checks" | "waivers">): PackageView["checks"] {
  const waived = new Set(waivers.map((waiver) => waiver.check));
  return checks.filter((check) => check.verdict === "warn" && !waived.has(check.code));
}
