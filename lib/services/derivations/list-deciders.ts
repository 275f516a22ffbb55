import { listDeciders } from "@/db/queries/mailed-people";
import type { Ctx } from "@/lib/services/context";

/** Names of those who may decide over a derivation, so that everybody sees whom to ask. Empty where nobody may. */
export async function listDeciderNames(ctx: Ctx, derivationId: string): Promise<string[]> {
  return (await listDeciders(ctx.db, "derivation", derivationId)).map(({ name }) => name);
}
