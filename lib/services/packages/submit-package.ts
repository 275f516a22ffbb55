import type { Trx } from "@/db/executor";
import { listChecks, listWaivers } from "@/db/queries/checks";
import { insertMakers, listMakers } from "@/db/queries/makers";
import { movePackage, type PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { packageEventData } from "./package-event";
import { assertPackageState, assertSetsApproved, lockLotAndPackage } from "./package-rules";
import { reviewDigestOf } from "./review-digest";
import { tellPackageDeciders } from "./tell-people";

/**
 * Asks a second person to decide over a draft; who asks is a maker from then on.
 * @throws AppError `package.not_found`, `package.wrong_state`, `package.check_failed`, `package.not_waived`,
 * `package.sets_lapsed`; nothing is then written
 */
export async function submitPackage(ctx: PersonCtx, { id }: { id: string }): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, id);
    assertPackageState(pkg, "draft");
    await assertChecksSettled(trx, pkg);
    await assertSetsApproved(trx, pkg.id);
    await addSubmitter(ctx, trx, pkg);
    const { reviewDigest, against } = await reviewDigestOf(trx, pkg);
    const waivers = (await listWaivers(trx, pkg.id)).length;
    await tellPackageDeciders(ctx, trx, pkg, waivers);
    await movePackage(trx, pkg.id, {
      state: "in-review",
      reviewDigest,
      againstDigest: against,
      submittedAt: ctx.now(),
      submittedBy: ctx.actor.id,
    });
    await appendEvent(ctx, trx, {
      action: "package.submitted",
      subject: pkg.id,
      data: packageEventData(pkg, {
        reviewDigest: reviewDigest.toString("hex"),
        against: against?.toString("hex") ?? null,
      }),
    });
  });
}

async function assertChecksSettled(trx: Trx, pkg: PackageRow): Promise<void> {
  const checks = await listChecks(trx, pkg.id);
  const failed = checks.filter((check) => check.verdict === "fail").map((check) => check.code);
  if (failed.length > 0) {
    const message = `The check ${failed.join(", ")} fails; mend it and build another package.`;
    throw new AppError("package.check_failed", { checks: failed, message });
  }
  const waived = new Set((await listWaivers(trx, pkg.id)).map((waiver) => waiver.checkCode));
  const open = checks.filter((check) => check.verdict === "warn" && !waived.has(check.code)).map((check) => check.code);
  if (open.length === 0) return;
  const message = `A reviewer who had no hand in the package has to waive the warning of ${open.join(", ")} first, or mend it and build again.`;
  throw new AppError("package.not_waived", { checks: open, message });
}

/** Evidence is added once: submitting again after taking back says nothing new. */
async function addSubmitter(ctx: PersonCtx, trx: Trx, pkg: PackageRow): Promise<void> {
  const makers = await listMakers(trx, "package", pkg.id);
  if (makers.some((maker) => maker.personId === ctx.actor.id && maker.act === "submitted")) return;
  const subject = { subjectKind: "package" as const, subjectId: pkg.id, at: ctx.now() };
  await insertMakers(trx, [{ ...subject, id: ctx.newId(), personId: ctx.actor.id, act: "submitted" }]);
}

/**
 * Makes a package under review a draft again, by who submitted it; one that is approved but not live, by any engineer: the
 * way out where what is live changed after the approval.
 * @throws AppError `package.not_found`, `package.wrong_state`, `auth.forbidden`
 */
export async function takeBackPackage(ctx: PersonCtx, { id }: { id: string }): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, id);
    assertPackageState(pkg, "in-review", "approved");
    if (pkg.state === "in-review" && pkg.submittedBy !== ctx.actor.id) {
      const message = "Only who submitted it takes it back; a reviewer can refuse it.";
      throw new AppError("auth.forbidden", { message });
    }
    await movePackage(trx, pkg.id, {
      state: "draft",
      reviewDigest: null,
      againstDigest: null,
      submittedAt: null,
      submittedBy: null,
      approvedAt: null,
    });
    await appendEvent(ctx, trx, {
      action: "package.taken-back",
      subject: pkg.id,
      data: packageEventData(pkg, { from: pkg.state }),
    });
  });
}
