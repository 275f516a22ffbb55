import { type DemoAccount, listAccountsOfDomain } from "@/db/queries/demo-accounts";
import { DEMO_DOMAIN } from "@/lib/domain/demo-accounts";
import type { Ctx } from "@/lib/services/context";

export type { DemoAccount };

/** The demo's accounts, for anyone to sign in with; none where the database holds no demo. */
export function listDemoAccounts(ctx: Ctx): Promise<DemoAccount[]> {
  return listAccountsOfDomain(ctx.db, DEMO_DOMAIN);
}
