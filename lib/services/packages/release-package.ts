import type { Db } from "@/db/executor";
import { insertLivePeriod } from "@/db/queries/live-periods";
import { getLot } from "@/db/queries/lots";
import { findLivePackage, movePackage, type PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import { goLive } from "./go-live";
import { packageEventData } from "./package-event";
import { assertPackageState, assertSetsApproved, lockLotAndPackage } from "./package-rules";

export type LiveChange = { id: string; reason?: string | undefined } & Confirmation;

/**
 * Makes an approved package live for its lot, in one transaction.
 * @returns the lot's new sequence
 * @throws AppError `auth.password_wrong`, `package.not_found`, `package.wrong_state`, `package.live_changed`,
 * `package.sets_lapsed`; nothing is then written
 */
export async function releasePackage(ctx: PersonCtx, input: LiveChange): Promise<number> {
  assertRole(ctx, "engineer", "reviewer");
  await confirmIdentity(ctx, input);
  return ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, input.id);
    assertPackageState(pkg, "approved");
    await assertLiveAsApproved(trx, pkg);
    await assertSetsApproved(trx, pkg.id);
    return goLive(ctx, trx, pkg, { kind: "release", reason: input.reason ?? null });
  });
}

/** The reviewer compared with what was live then. @throws AppError `package.live_changed` */
async function assertLiveAsApproved(db: Db, pkg: PackageRow): Promise<void> {
  const live = await findLivePackage(db, pkg.lotId);
  const same =
    (live?.digest ?? null) === null
      ? pkg.againstDigest === null
      : live?.digest?.equals(pkg.againstDigest ?? Buffer.alloc(0));
  if (same) return;
  const message =
    "What is live changed since the approval; take the package back and have the differences looked at again.";
  throw new AppError("package.live_changed", { live: live?.version ?? null, message });
}

/**
 * Stops the live package at once; one person suffices, as nothing goes on by it.
 * @returns the lot's new sequence
 * @throws AppError `auth.password_wrong`, `package.not_found`, `package.wrong_state`; nothing is then written
 */
export async function withdrawPackage(ctx: PersonCtx, input: LiveChange): Promise<number> {
  assertRole(ctx, "engineer", "reviewer");
  await confirmIdentity(ctx, input);
  return ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, input.id);
    assertPackageState(pkg, "live");
    const sequence = (await getLot(trx, pkg.lotId)).sequence + 1;
    await movePackage(trx, pkg.id, { state: "withdrawn" });
    await insertLivePeriod(trx, {
      id: ctx.newId(),
      lotId: pkg.lotId,
      sequence,
      kind: "withdrawal",
      packageId: pkg.id,
      reason: input.reason ?? null,
      personId: ctx.actor.id,
      startedAt: ctx.now(),
      releaseDocument: null,
      signature: null,
      keyId: null,
    });
    await appendEvent(ctx, trx, {
      action: "package.withdrawn",
      subject: pkg.id,
      data: packageEventData(pkg, { sequence }),
      texts: { reason: input.reason },
    });
    return sequence;
  });
}
