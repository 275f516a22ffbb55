import type { Db, Trx } from "@/db/executor";
import { lockLot } from "@/db/queries/lots";
import { listMakers } from "@/db/queries/makers";
import { listLapsedSets } from "@/db/queries/package-inputs";
import { getPackage, lockPackage, type PackageRow, type PackageState } from "@/db/queries/packages";
import { EVIDENCE_MAX, someSerials } from "@/lib/domain/package-checks/check";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";

const STATE_WORDS: Record<PackageState, string> = {
  building: "still building",
  draft: "a draft",
  failed: "failed",
  "in-review": "in review",
  approved: "approved",
  refused: "refused",
  live: "live",
  superseded: "superseded",
  withdrawn: "withdrawn",
};

/**
 * A package under the locks of its lot and itself, always in this order, so that two who move packages of one lot wait for
 * each other and never for ever.
 * @throws AppError `package.not_found`
 */
export async function lockLotAndPackage(trx: Trx, id: string): Promise<PackageRow> {
  const { lotId } = await getPackage(trx, id);
  await lockLot(trx, lotId);
  return lockPackage(trx, id);
}

/** Refuses what is in none of the states that a move starts from. @throws AppError `package.wrong_state` {state, needs} */
export function assertPackageState({ state }: PackageRow, ...needs: readonly PackageState[]): void {
  if (needs.includes(state)) return;
  const words = needs.map((one) => STATE_WORDS[one]).join(" or ");
  throw new AppError("package.wrong_state", {
    state,
    needs,
    message: `The package is ${STATE_WORDS[state]}; it has to be ${words}.`,
  });
}

/** Refuses whoever had a hand in the package. @throws AppError `package.self_approval` {acts} */
export async function assertNoPackageMaker(ctx: PersonCtx, db: Db, packageId: string): Promise<void> {
  const own = (await listMakers(db, "package", packageId)).filter((maker) => maker.personId === ctx.actor.id);
  if (own.length === 0) return;
  const acts = [...new Set(own.map((maker) => maker.act))];
  const message = `You ${acts.join(", ")} for this package; a second person has to decide on it.`;
  throw new AppError("package.self_approval", { acts, message });
}

/** Refuses a package with coefficients that are stale or revoked since. @throws AppError `package.sets_lapsed` {serials, count} */
export async function assertSetsApproved(db: Db, packageId: string): Promise<void> {
  const lapsed = await listLapsedSets(db, packageId);
  if (lapsed.length === 0) return;
  const serials = lapsed.map((one) => one.serial);
  const states = [...new Set(lapsed.map((one) => one.state))].join(" or ");
  const message = `Coefficients of ${someSerials(serials)} are ${states} by now; build another package.`;
  throw new AppError("package.sets_lapsed", { count: lapsed.length, serials: serials.slice(0, EVIDENCE_MAX), message });
}
