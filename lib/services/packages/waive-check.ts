import { insertWaiver, listChecks, listWaivers } from "@/db/queries/checks";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import { packageEventData } from "./package-event";
import { assertNoPackageMaker, assertPackageState, lockLotAndPackage } from "./package-rules";

/**
 * Accepts the warning of one check with a reason, before the package is submitted.
 * @throws AppError `auth.password_wrong`, `package.not_found`, `package.self_approval`, `package.wrong_state`,
 * `check.not_found`, `check.not_waivable`, `waiver.exists`; nothing is then written
 */
export async function waiveCheck(
  ctx: PersonCtx,
  input: { id: string; check: string; reason: string } & Confirmation,
): Promise<void> {
  assertRole(ctx, "reviewer");
  await confirmIdentity(ctx, input);
  await ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, input.id);
    await assertNoPackageMaker(ctx, trx, pkg.id);
    assertPackageState(pkg, "draft");
    const found = (await listChecks(trx, pkg.id)).find((check) => check.code === input.check);
    if (!found)
      throw new AppError("check.not_found", { check: input.check, message: "The package has no such check." });
    if (found.verdict !== "warn") {
      const message = `The check ${found.code} ${found.verdict === "pass" ? "passed" : "failed"}; only a warning can be waived.`;
      throw new AppError("check.not_waivable", { check: found.code, verdict: found.verdict, message });
    }
    if ((await listWaivers(trx, pkg.id)).some((waiver) => waiver.checkCode === found.code)) {
      throw new AppError("waiver.exists", { check: found.code, message: "This warning was waived before." });
    }
    await insertWaiver(trx, pkg.id, {
      id: ctx.newId(),
      checkCode: found.code,
      personId: ctx.actor.id,
      personName: ctx.actor.name,
      reason: input.reason,
      at: ctx.now(),
    });
    await appendEvent(ctx, trx, {
      action: "package.check-waived",
      subject: pkg.id,
      data: packageEventData(pkg, { check: found.code }),
      texts: { reason: input.reason },
    });
  });
}
