import type { z } from "zod";
import { getFamily } from "@/db/queries/families";
import { getLayout } from "@/db/queries/layouts";
import { layoutStep } from "@/lib/domain/semver-step";
import type { Ctx } from "@/lib/services/context";
import type { compareLayoutsQuery, layoutComparison } from "@/schemas/api/compare";

/** Every difference between two layouts of a family, and the version step that each asks for. @throws AppError `family.not_found`, `layout.not_found` */
export async function compareLayouts(
  ctx: Ctx,
  input: z.output<typeof compareLayoutsQuery>,
): Promise<z.input<typeof layoutComparison>> {
  const family = await getFamily(ctx.db, input.family);
  const from = await getLayout(ctx.db, family.id, input.from);
  const to = await getLayout(ctx.db, family.id, input.to);
  const { step, reasons } = layoutStep(from.document, to.document);
  return { family: family.code, from: from.version, to: to.version, step: step ?? "patch", changes: reasons };
}
