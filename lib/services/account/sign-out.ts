import { insertAccess } from "@/db/queries/access-log";
import { endSession } from "@/db/queries/sessions";
import type { Ctx } from "@/lib/services/context";

/** Ends a session for every copy of its cookie. Signing out twice does nothing the second time. */
export async function signOut(ctx: Ctx, sessionId: string): Promise<void> {
  const now = ctx.now();
  await ctx.db.transaction().execute(async (trx) => {
    const personId = await endSession(trx, sessionId, now);
    if (personId) await insertAccess(trx, { at: now, kind: "sign-out", personId, address: ctx.address });
  });
}
