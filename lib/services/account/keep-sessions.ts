import * as query from "@/db/queries/sessions";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { SessionView } from "@/schemas/api/account";

/** One's own sessions that last, newest first. */
export async function listSessions(
  ctx: PersonCtx,
  page: { limit: number; cursor?: string },
): Promise<Page<SessionView>> {
  const limit = page.limit + 1;
  const rows = await query.listSessions(ctx.db, ctx.actor.id, { now: ctx.now(), limit, before: page.cursor });
  const views = rows.map(({ id, userAgent, address, ...times }) => ({
    id,
    userAgent,
    address,
    createdAt: times.createdAt.toISOString(),
    lastSeenAt: times.lastSeenAt.toISOString(),
    expiresAt: times.expiresAt.toISOString(),
    current: id === ctx.actor.sessionId,
  }));
  return pageOf(views, page.limit, (row) => row.id);
}

/** Ends one of one's own sessions at once. @throws AppError `session.not_found` */
export async function endSession(ctx: PersonCtx, id: string): Promise<void> {
  if (await query.endSessionOf(ctx.db, ctx.actor.id, id, ctx.now())) return;
  throw new AppError("session.not_found", { session: id, message: "You have no such session, or it ended before." });
}

/** Ends all of one's own sessions but the one that asks. */
export async function endOtherSessions(ctx: PersonCtx): Promise<void> {
  await ctx.db.transaction().execute((trx) => query.endSessionsOf(trx, ctx.actor.id, ctx.now(), ctx.actor.sessionId));
}
