import type { z } from "zod";
import { getPerson } from "@/db/queries/people";
import type { PersonCtx } from "@/lib/services/context";
import type { account } from "@/schemas/api/account";

/** Who asks, as the product knows them. */
export async function getAccount(ctx: PersonCtx): Promise<z.input<typeof account>> {
  const { id, name, email, oneTimeEnrolledAt } = await getPerson(ctx.db, ctx.actor.id);
  return { id, name, email, roles: [...ctx.actor.roles], oneTimeCode: oneTimeEnrolledAt !== null };
}
