import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** How many coefficient sets of each derivation that used a run are stale; derivations without one are left out. */
export async function countStaleSetsOfRun(db: Db, runId: string): Promise<Map<string, number>> {
  const rows = await db
    .selectFrom("coefficientSet")
    .innerJoin("derivationRun", "derivationRun.derivationId", "coefficientSet.derivationId")
    .select(["coefficientSet.derivationId", sql<number>`count(*)::int`.as("count")])
    .where("derivationRun.runId", "=", runId)
    .where("coefficientSet.state", "=", "stale")
    .groupBy("coefficientSet.derivationId")
    .execute();
  return new Map(rows.map(({ derivationId, count }) => [derivationId, count]));
}
