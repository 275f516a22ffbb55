import { deleteAccessBefore } from "@/db/queries/access-log";
import { deleteRepliesBefore, KEPT_MS } from "@/db/queries/idempotency";
import { deleteMailBefore } from "@/db/queries/mail";
import { deleteLinksBefore } from "@/db/queries/password-links";
import { deleteSessionsBefore } from "@/db/queries/sessions";
import type { Ctx } from "@/lib/services/context";

const DAY_MS = 24 * 60 * 60 * 1000;

/** Days that things are kept after they ended; what has to stay for ever stands in the ledger and is not touched here. */
export const RETENTION_DAYS = { session: 30, accessLog: 90, passwordLink: 7, mail: 90 } as const;

export interface Tidied {
  sessions: number;
  accesses: number;
  links: number;
  replies: number;
  mail: number;
}

/** Deletes what nobody needs any more. Safe to repeat and to run twice at once. @returns how many rows of each kind went */
export async function tidy(ctx: Ctx): Promise<Tidied> {
  const now = ctx.now().getTime();
  const daysAgo = (days: number) => new Date(now - days * DAY_MS);
  return {
    sessions: await deleteSessionsBefore(ctx.db, daysAgo(RETENTION_DAYS.session)),
    accesses: await deleteAccessBefore(ctx.db, daysAgo(RETENTION_DAYS.accessLog)),
    links: await deleteLinksBefore(ctx.db, daysAgo(RETENTION_DAYS.passwordLink)),
    replies: await deleteRepliesBefore(ctx.db, new Date(now - KEPT_MS)),
    mail: await deleteMailBefore(ctx.db, daysAgo(RETENTION_DAYS.mail)),
  };
}
