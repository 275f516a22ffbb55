import { type DerivationRow, failDerivation, lockDerivation } from "@/db/queries/derivations";
import type { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";

/** Ends a derivation that can't go on, unless it ended already. */
export async function endDerivation(ctx: Ctx, { id, lotCode }: DerivationRow, error: AppError): Promise<void> {
  await ctx.db.transaction().execute(async (trx) => {
    if ((await lockDerivation(trx, id)).state !== "working") return;
    await failDerivation(trx, id, { code: error.code, message: error.message }, ctx.now());
    await appendEvent(ctx, trx, { action: "derivation.failed", subject: id, data: { lot: lotCode, code: error.code } });
  });
}
