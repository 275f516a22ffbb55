import type { Json } from "@/db/generated/types.generated";
import { getPackage, setRebuild } from "@/db/queries/packages";
import { enqueue } from "@/lib/jobs/enqueue";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { packageEventData } from "./package-event";
import { getBuiltPackage } from "./read-images";
import { repeatBuild } from "./repeat-build";

/**
 * Asks for a built package to be composed again and compared; what comes of it stands in the package's `rebuild`, which is
 * null until then.
 * @throws AppError `package.not_found`, `package.not_built`, `auth.forbidden`
 */
export async function askRebuild(ctx: PersonCtx, { id }: { id: string }): Promise<void> {
  assertRole(ctx, "engineer", "reviewer");
  await getBuiltPackage(ctx, id);
  await ctx.db.transaction().execute(async (trx) => {
    await setRebuild(trx, id, null);
    await enqueue(trx, "rebuild-package", { packageId: id, askedBy: ctx.actor.id });
  });
}

/** The worker's part: composes again, compares, and records what came of it. */
export async function rebuildPackage(ctx: Ctx, input: { packageId: string; askedBy: string }): Promise<void> {
  const pkg = await getPackage(ctx.db, input.packageId);
  const repeated = await repeatBuild(ctx.db, pkg);
  const rebuild = { ...repeated, at: ctx.now().toISOString() };
  await ctx.db.transaction().execute(async (trx) => {
    await setRebuild(trx, pkg.id, rebuild as unknown as Json);
    await appendEvent(ctx, trx, {
      action: "package.rebuilt",
      subject: pkg.id,
      data: packageEventData(pkg, {
        askedBy: input.askedBy,
        same: repeated.same,
        ...(repeated.differs && { repeated: repeated.differs.repeated }),
      }),
    });
  });
}
