import type { Trx } from "@/db/executor";
import { insertApproval } from "@/db/queries/approvals";
import { movePackage, type PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import { packageEventData } from "./package-event";
import { assertNoPackageMaker, assertPackageState, assertSetsApproved, lockLotAndPackage } from "./package-rules";
import { reviewDigestOf } from "./review-digest";
import { tellSubmitter } from "./tell-people";

export interface PackageDecision extends Confirmation {
  decision: "approve" | "refuse";
  /** What the person saw, lower-case hex. */
  reviewDigest: string;
  /** Needed to refuse. */
  reason?: string | undefined;
}

/** What the signature means, as the person sees it before signing. */
export function meaningOfDecision(decision: "approve" | "refuse", pkg: { version: string; lotCode: string }): string {
  const subject = `package ${pkg.version} of lot ${pkg.lotCode}`;
  return decision === "approve"
    ? `I have looked at differences, checks and waivers and approve ${subject} for release.`
    : `I refuse ${subject}.`;
}

/**
 * A second person's decision over a package in review. It names what was seen; anything else than that is refused.
 * @throws AppError `auth.password_wrong`, `package.not_found`, `package.self_approval`, `package.wrong_state`,
 * `package.changed` {reviewDigest}, `package.sets_lapsed`; nothing is then written
 */
export async function decidePackage(ctx: PersonCtx, input: PackageDecision & { id: string }): Promise<void> {
  assertRole(ctx, "reviewer");
  await confirmIdentity(ctx, input);
  await ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, input.id);
    await assertNoPackageMaker(ctx, trx, pkg.id);
    assertPackageState(pkg, "in-review");
    const digest = await assertSeen(trx, pkg, input.reviewDigest);
    const approve = input.decision === "approve";
    if (approve) await assertSetsApproved(trx, pkg.id);
    const at = ctx.now();
    await insertApproval(trx, {
      id: ctx.newId(),
      subjectKind: "package",
      subjectId: pkg.id,
      decision: input.decision,
      personId: ctx.actor.id,
      personName: ctx.actor.name,
      meaning: meaningOfDecision(input.decision, pkg),
      reason: input.reason ?? null,
      digest,
      serialCount: null,
      at,
    });
    await movePackage(trx, pkg.id, approve ? { state: "approved", approvedAt: at } : { state: "refused" });
    if (!approve) await tellSubmitter(ctx, trx, pkg, input.reason ?? "");
    await appendEvent(ctx, trx, {
      action: approve ? "package.approved" : "package.refused",
      subject: pkg.id,
      data: packageEventData(pkg, { reviewDigest: input.reviewDigest }),
      texts: { reason: input.reason },
    });
  });
}

/**
 * What the decision is about is what the person saw. Where another package went live since the submission, the stored
 * digest is brought up to date first: the database compares with it once more.
 * @throws AppError `package.changed` {reviewDigest}
 */
async function assertSeen(trx: Trx, pkg: PackageRow, seen: string): Promise<Buffer> {
  const { reviewDigest, against } = await reviewDigestOf(trx, pkg);
  const now = reviewDigest.toString("hex");
  if (seen !== now) {
    const message = "The package, its waivers or what is live changed since you looked; look at it again.";
    throw new AppError("package.changed", { reviewDigest: now, message });
  }
  if (!pkg.reviewDigest?.equals(reviewDigest)) {
    await movePackage(trx, pkg.id, { state: "in-review", reviewDigest, againstDigest: against });
  }
  return reviewDigest;
}
