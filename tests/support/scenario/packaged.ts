import type { PersonCtx } from "@/lib/services/context";
import { buildPackage } from "@/lib/services/packages/build-package";
import { decidePackage } from "@/lib/services/packages/decide-package";
import { getPackageView } from "@/lib/services/packages/get-package";
import { releasePackage } from "@/lib/services/packages/release-package";
import { startBuild } from "@/lib/services/packages/start-build";
import { submitPackage } from "@/lib/services/packages/submit-package";
import { waiveCheck } from "@/lib/services/packages/waive-check";
import { systemContext } from "../jobs";
import type { DerivedLot } from "./derived";
import type { ScenarioPeople } from "./family-lot";

export interface BuiltPackage {
  id: string;
  version: string;
}

export interface BuildChange {
  /** Version of the layout; the golden lot's own where left out. */
  layout?: string;
  step?: "major" | "minor" | "patch" | undefined;
  /** Who builds; the scenario's engineer where left out. */
  by?: PersonCtx;
}

/** A package of a derived lot, built by the engineer: a draft. */
export async function buildGolden(
  people: ScenarioPeople,
  derived: Pick<DerivedLot, "lot" | "layoutVersion">,
  { layout = derived.layoutVersion, step, by = people.engineer }: BuildChange = {},
): Promise<BuiltPackage> {
  const { id, version } = await startBuild(by, { lot: derived.lot, layout, ...(step && { step }) });
  await buildPackage(systemContext(people.engineer.db), { packageId: id });
  return { id, version };
}

/** Waives every warning as the reviewer and submits as the engineer. */
export async function submitBuilt(
  { engineer, reviewer, password }: ScenarioPeople,
  { id }: BuiltPackage,
): Promise<void> {
  const { checks, waivers } = await getPackageView(reviewer, id);
  const waived = new Set(waivers.map((one) => one.check));
  for (const { code, verdict } of checks) {
    if (verdict !== "warn" || waived.has(code)) continue;
    await waiveCheck(reviewer, { id, check: code, reason: "Looked at, of no weight here", password });
  }
  await submitPackage(engineer, { id });
}

/** Approves a submitted package as the reviewer. */
export async function approveSubmitted({ reviewer, password }: ScenarioPeople, { id }: BuiltPackage): Promise<void> {
  const { reviewDigest } = await getPackageView(reviewer, id);
  await decidePackage(reviewer, { id, decision: "approve", reviewDigest: reviewDigest as string, password });
}

/** Makes an approved package live as the engineer; the password is everybody's in tests. @returns the lot's sequence */
export function releaseApproved({ engineer, password }: ScenarioPeople, { id }: BuiltPackage): Promise<number> {
  return releasePackage(engineer, { id, password });
}

/** Built and in review. */
export async function arrangeSubmitted(
  people: ScenarioPeople,
  derived: DerivedLot,
  change?: BuildChange,
): Promise<BuiltPackage> {
  const built = await buildGolden(people, derived, change);
  await submitBuilt(people, built);
  return built;
}

/** Built, submitted and approved. */
export async function arrangeApproved(
  people: ScenarioPeople,
  derived: DerivedLot,
  change?: BuildChange,
): Promise<BuiltPackage> {
  const built = await arrangeSubmitted(people, derived, change);
  await approveSubmitted(people, built);
  return built;
}

/** Built, submitted, approved and live. */
export async function arrangeReleased(
  people: ScenarioPeople,
  derived: DerivedLot,
  change?: BuildChange,
): Promise<BuiltPackage> {
  const built = await arrangeApproved(people, derived, change);
  await releaseApproved(people, built);
  return built;
}
