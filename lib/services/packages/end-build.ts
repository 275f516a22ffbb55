import type { Trx } from "@/db/executor";
import type { Json } from "@/db/generated/types.generated";
import { finishPackage, lockPackage, type PackageRow } from "@/db/queries/packages";
import type { AppError } from "@/lib/errors";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { assertPackageState, lockLotAndPackage } from "./package-rules";

/** What a build failed with: where one is to blame the device and field, its value and the limit it breaks, in the field's unit. */
export interface BuildFailure {
  code: string;
  message: string;
  serial?: string;
  field?: string;
  value?: number | string;
  limit?: number | string;
}

/** Ends a build that can't go on, unless it ended already. */
export async function failBuild(ctx: Ctx, pkg: PackageRow, error: AppError): Promise<void> {
  const failure = failureOf(error);
  await ctx.db.transaction().execute(async (trx) => {
    if ((await lockPackage(trx, pkg.id)).state !== "building") return;
    await endAsFailed(ctx, trx, pkg, failure);
    const { code, serial, field } = failure;
    await appendEvent(ctx, trx, {
      action: "package.build-failed",
      subject: pkg.id,
      data: { lot: pkg.lotCode, version: pkg.version, code, ...(serial && { serial }), ...(field && { field }) },
    });
  });
}

/**
 * Ends a build on somebody's wish; the worker hears it at its next part. The number is passed over.
 * @throws AppError `package.not_found`, `package.wrong_state` once it ended, `auth.forbidden`; nothing is then written
 */
export async function cancelBuild(ctx: PersonCtx, { id }: { id: string }): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, id);
    assertPackageState(pkg, "building");
    const message = "The build was cancelled before it was done.";
    await endAsFailed(ctx, trx, pkg, { code: "package.cancelled", message });
    await appendEvent(ctx, trx, {
      action: "package.build-cancelled",
      subject: pkg.id,
      data: { lot: pkg.lotCode, version: pkg.version, step: pkg.progressStep },
    });
  });
}

function endAsFailed(ctx: Ctx, trx: Trx, pkg: PackageRow, failure: BuildFailure): Promise<void> {
  return finishPackage(trx, pkg.id, {
    state: "failed",
    digest: null,
    counts: pkg.counts as Json,
    failure: failure as unknown as Json,
    builtAt: ctx.now(),
  });
}

function failureOf({ code, message, details }: AppError): BuildFailure {
  const { serial, field, value, limit } = details;
  return {
    code,
    message,
    ...(typeof serial === "string" && { serial }),
    ...(typeof field === "string" && { field }),
    ...(isFigure(value) && { value }),
    ...(isFigure(limit) && { limit }),
  };
}

/** A number, or one beyond binary64 as decimal text. */
const isFigure = (value: unknown): value is number | string => typeof value === "number" || typeof value === "string";
