import { countStaleSetsOfRun } from "@/db/queries/stale-sets";
import type { Ctx } from "@/lib/services/context";

/** Stale coefficient sets that rest on a run, by derivation. */
export async function countStaleSets(ctx: Ctx, runId: string): Promise<ReadonlyMap<string, number>> {
  return countStaleSetsOfRun(ctx.db, runId);
}
