import { isOneTimeEnrolled } from "@/db/queries/person-names";
import type { PersonCtx } from "@/lib/services/context";

/** Whether the person of a page signs with a one-time code besides the password. */
export function hasOneTimeCode(ctx: PersonCtx): Promise<boolean> {
  return isOneTimeEnrolled(ctx.db, ctx.actor.id);
}
