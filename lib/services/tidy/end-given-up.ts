import { getDerivation } from "@/db/queries/derivations";
import { listGivenUp } from "@/db/queries/given-up";
import { getPackage } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { endDerivation } from "@/lib/services/derivations/end-derivation";
import { failBuild } from "@/lib/services/packages/end-build";

/**
 * Ends as failed what the queue gave up: begun again and again, and every time the worker fell or the database was gone. Without
 * this it would stand as being worked on for ever. Safe to repeat and to run twice at once.
 * @returns how many builds and derivations ended
 */
export async function endGivenUp(ctx: Ctx): Promise<number> {
  const { packages, derivations } = await listGivenUp(ctx.db);
  const error = (what: string) =>
    new AppError("job.given_up", {
      message: `It was begun several times and never came to its end; the log of the worker says why. ${what}`,
    });
  for (const id of packages) await failBuild(ctx, await getPackage(ctx.db, id), error("Build the package again."));
  for (const id of derivations)
    await endDerivation(ctx, await getDerivation(ctx.db, id), error("Derive the coefficients again."));
  return packages.length + derivations.length;
}
