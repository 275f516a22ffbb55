import { getLot, lockLot } from "@/db/queries/lots";
import { getPackage } from "@/db/queries/packages";
import { insertReinstatement } from "@/db/queries/reinstatements";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { packageEventData } from "@/lib/services/packages/package-event";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import { assertNotBlocked, assertSuperseded } from "./reinstatement-blocks";

/**
 * Asks for an earlier release of a lot to be made live again; a reviewer other than who asks decides.
 * @returns the request's id
 * @throws AppError `auth.password_wrong`, `lot.not_found`, `package.not_found`, `package.wrong_state`,
 * `reinstatement.already_live`, `reinstatement.withdrawn`, `reinstatement.blocked`, `reinstatement.exists`
 */
export async function askReinstatement(
  ctx: PersonCtx,
  input: { lot: string; package: string; reason: string } & Confirmation,
): Promise<string> {
  assertRole(ctx, "engineer", "reviewer");
  await confirmIdentity(ctx, input);
  const { id: lotId, code } = await getLot(ctx.db, input.lot);
  return ctx.db.transaction().execute(async (trx) => {
    await lockLot(trx, lotId);
    const pkg = await getPackage(trx, input.package);
    if (pkg.lotId !== lotId) {
      throw new AppError("package.not_found", { message: `That package is of lot ${pkg.lotCode}, not ${code}.` });
    }
    assertSuperseded(pkg);
    await assertNotBlocked(trx, pkg);
    const id = ctx.newId();
    await insertReinstatement(trx, {
      id,
      lotId,
      packageId: pkg.id,
      reason: input.reason,
      askedBy: ctx.actor.id,
      askedAt: ctx.now(),
    });
    await appendEvent(ctx, trx, {
      action: "reinstatement.asked",
      subject: id,
      data: packageEventData(pkg, { package: pkg.id }),
      texts: { reason: input.reason },
    });
    return id;
  });
}
