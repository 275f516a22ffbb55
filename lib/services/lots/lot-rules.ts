import type { Db } from "@/db/executor";
import { type FamilyRevisionRow, getFamilyRevision } from "@/db/queries/families";
import { getLot } from "@/db/queries/lots";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import type { Ctx } from "@/lib/services/context";

/** The family revision that a lot pins, and its values as the arithmetic takes them. */
export async function getLotRules(
  db: Db,
  lot: { familyRevisionId: string },
): Promise<{ revision: FamilyRevisionRow; rules: FamilyRules }> {
  const revision = await getFamilyRevision(db, lot.familyRevisionId);
  return { revision, rules: revision.document };
}

/** The values that hold for a lot. @throws AppError `lot.not_found` */
export async function getRulesOfLot(ctx: Ctx, codeOrId: string): Promise<FamilyRules> {
  const { rules } = await getLotRules(ctx.db, await getLot(ctx.db, codeOrId));
  return rules;
}
