import { getDerivation } from "@/db/queries/derivations";
import { listPackagesOfDerivation } from "@/db/queries/set-packages";
import type { Ctx } from "@/lib/services/context";
import type { SetPackage } from "@/schemas/api/derivation-tables";

/** Packages with images from a derivation's coefficients, newest first. @throws AppError `derivation.not_found` */
export async function listSetPackages(ctx: Ctx, id: string): Promise<{ items: SetPackage[] }> {
  await getDerivation(ctx.db, id);
  return { items: await listPackagesOfDerivation(ctx.db, id) };
}
