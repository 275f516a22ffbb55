import type { Db } from "@/db/executor";
import { type FamilyRevisionRow, getFamilyRevision } from "@/db/queries/families";
import type { FamilyRules } from "@/lib/domain/compensation/types";

/** The family revision that a lot pins, and its values as the arithmetic takes them. */
export async function getLotRules(
  db: Db,
  lot: { familyRevisionId: string },
): Promise<{ revision: FamilyRevisionRow; rules: FamilyRules }> {
  const revision = await getFamilyRevision(db, lot.familyRevisionId);
  return { revision, rules: revision.document };
}
