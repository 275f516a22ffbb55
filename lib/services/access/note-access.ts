import { type AccessKind, insertAccess } from "@/db/queries/access-log";
import type { Ctx } from "@/lib/services/context";

/** Notes in the access log, apart from the ledger, that somebody took something. */
export async function noteAccess(ctx: Ctx, kind: AccessKind, detail: Record<string, string> = {}): Promise<void> {
  const { actor, address } = ctx;
  const personId = actor.kind === "person" ? actor.id : null;
  const stationId = actor.kind === "station" ? actor.id : null;
  await insertAccess(ctx.db, { at: ctx.now(), kind, personId, stationId, address, detail });
}
