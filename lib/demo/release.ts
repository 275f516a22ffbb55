/** Packages of the demo: built, waived, submitted, approved and released by the people whose work each is. */
import { listChecks, listWaivers } from "@/db/queries/checks";
import { getPackage } from "@/db/queries/packages";
import { DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import { decidePackage } from "@/lib/services/packages/decide-package";
import { releasePackage } from "@/lib/services/packages/release-package";
import { startBuild } from "@/lib/services/packages/start-build";
import { submitPackage } from "@/lib/services/packages/submit-package";
import { waiveCheck } from "@/lib/services/packages/waive-check";
import type { DemoLot } from "./lot";
import type { Story } from "./story";

const password = DEMO_PASSWORD;

/** Builds a package and lets the worker finish it. @returns its id */
export async function buildLot(story: Story, lot: DemoLot, layout: string, notes?: string): Promise<string> {
  const { id } = await startBuild(story.as("engineer"), { lot: lot.code, layout, notes });
  await story.work();
  return id;
}

/** Waives every warning that has no waiver yet. */
export async function waiveWarnings(story: Story, id: string, reason: string): Promise<void> {
  const waived = new Set((await listWaivers(story.db, id)).map((waiver) => waiver.checkCode));
  for (const check of await listChecks(story.db, id)) {
    if (check.verdict !== "warn" || waived.has(check.code)) continue;
    await waiveCheck(story.as("reviewer"), { id, check: check.code, reason, password });
  }
}

/** Waives what is only a warning and asks for review. */
export async function askForReview(story: Story, id: string, reason: string): Promise<void> {
  await waiveWarnings(story, id, reason);
  await submitPackage(story.as("engineer"), { id });
}

/** Approves a package in review over what stands there. */
export async function approvePackage(story: Story, id: string): Promise<void> {
  const { reviewDigest } = await getPackage(story.db, id);
  await decidePackage(story.as("reviewer2"), {
    id,
    decision: "approve",
    reviewDigest: reviewDigest?.toString("hex") ?? "",
    password,
  });
}

/** Makes an approved package live, and lets the worker assemble its bundle. */
export async function release(story: Story, id: string): Promise<void> {
  await releasePackage(story.as("engineer"), { id, password });
  await story.work();
}
