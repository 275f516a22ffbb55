import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { Json } from "@/db/generated/types.generated";

export type Verdict = "pass" | "warn" | "fail";

/** One machine-made verdict on a package with its evidence. */
export interface CheckRow {
  code: string;
  verdict: Verdict;
  message: string;
  evidence: Json;
}

/** Stores the checks of a package that is building, in their order. */
export async function insertChecks(trx: Trx, packageId: string, checks: readonly CheckRow[]): Promise<void> {
  if (checks.length === 0) return;
  await trx
    .insertInto("packageCheck")
    .values(
      checks.map((check, position) => ({ ...check, packageId, position, evidence: JSON.stringify(check.evidence) })),
    )
    .execute();
}

/** Checks of a package in their order. */
export async function listChecks(db: Db, packageId: string): Promise<CheckRow[]> {
  const rows = await db
    .selectFrom("packageCheck")
    .select(["code", "verdict", "message", "evidence"])
    .where("packageId", "=", packageId)
    .orderBy("position")
    .execute();
  return rows.map((row) => ({ ...row, verdict: row.verdict as Verdict }));
}

/** How many checks of each package came to each verdict. */
export async function countVerdicts(
  db: Db,
  packageIds: readonly string[],
): Promise<Map<string, Partial<Record<Verdict, number>>>> {
  const counts = new Map<string, Partial<Record<Verdict, number>>>();
  if (packageIds.length === 0) return counts;
  const rows = await db
    .selectFrom("packageCheck")
    .select(["packageId", "verdict", sql<number>`count(*)::int`.as("count")])
    .where("packageId", "in", [...packageIds])
    .groupBy(["packageId", "verdict"])
    .execute();
  for (const { packageId, verdict, count } of rows) {
    counts.set(packageId, { ...counts.get(packageId), [verdict]: count });
  }
  return counts;
}

export interface WaiverRow {
  id: string;
  checkCode: string;
  personId: string;
  personName: string;
  reason: string;
  at: Date;
}

/**
 * Records a waiver. The database refuses makers, people without the role, a wrong state and checks that are no warning.
 * @throws `package.self_approval`, `package.wrong_state`, `check.not_found`, `check.not_waivable`, `waiver.exists`
 */
export async function insertWaiver(trx: Trx, packageId: string, waiver: WaiverRow): Promise<void> {
  await trx
    .insertInto("waiver")
    .values({ packageId, ...waiver })
    .execute();
}

/** Waivers of a package, by check. */
export function listWaivers(db: Db, packageId: string): Promise<WaiverRow[]> {
  return db
    .selectFrom("waiver")
    .select(["id", "checkCode", "personId", "personName", "reason", "at"])
    .where("packageId", "=", packageId)
    .orderBy("checkCode")
    .execute();
}
