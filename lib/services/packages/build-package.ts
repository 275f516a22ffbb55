import { sha256Hex } from "@/builders/bundle/sha256";
import { appErrorFromDatabase } from "@/db/constraint-codes";
import type { Trx } from "@/db/executor";
import type { Json } from "@/db/generated/types.generated";
import { insertChecks } from "@/db/queries/checks";
import { insertImages } from "@/db/queries/images";
import { lockLot } from "@/db/queries/lots";
import { insertMakers, listMakers, type MakerAct } from "@/db/queries/makers";
import {
  finishPackage,
  getPackage,
  insertPackageDerivations,
  insertPackageFile,
  lockPackage,
  type PackageRow,
  setPackageProgress,
} from "@/db/queries/packages";
import type { PackageCheck } from "@/lib/domain/package-checks/check";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { PackageChecker } from "./check-package";
import { chooseSets, type Selection, serialsSha256, setsSha256 } from "./choose-sets";
import { type ComposedPackage, composePackage, type PackageInputs, readPackageInputs } from "./compose-package";
import { countSelection, countsOf } from "./package-counts";

/** What a build failed with: the device and field where one is to blame. */
export interface BuildFailure {
  code: string;
  message: string;
  serial?: string;
  field?: string;
}

/**
 * The worker's part of a build: composes the package, checks it by decoding it again, and stores everything in one
 * transaction. Taken up again after a fall it starts anew, and does nothing where the package has ended already. What can't
 * be built ends as failed and leaves no image.
 * @throws what is wrong with the database or with our code, so that the queue tries again or the log tells
 */
export async function buildPackage(ctx: Ctx, { packageId }: { packageId: string }): Promise<void> {
  const pkg = await getPackage(ctx.db, packageId);
  if (pkg.state !== "building") return;
  try {
    await store(ctx, pkg, await compose(ctx, pkg));
  } catch (error) {
    if (appErrorFromDatabase(error)?.code === "database.unavailable") throw error;
    const known = error instanceof AppError ? error : undefined;
    const message = "Something went wrong here; the log of the worker says what.";
    await fail(ctx, pkg, known ?? new AppError("server.fault", { message }));
    if (!known) throw error;
  }
}

interface Built {
  selection: Selection;
  composed: ComposedPackage;
  checks: PackageCheck[];
  inputs: PackageInputs;
}

async function compose(ctx: Ctx, pkg: PackageRow): Promise<Built> {
  const inputs = await readPackageInputs(ctx.db, pkg);
  const selection = await select(ctx.db, pkg, inputs);
  const total = selection.packed.length;
  await setPackageProgress(ctx.db, pkg.id, 0, total, "encoding");
  const checker = new PackageChecker(inputs);
  const composed = await composePackage(ctx.db, inputs, selection.packed, {
    withDetail: true,
    onImage: (image) => checker.add(image),
    onProgress: (done) => setPackageProgress(ctx.db, pkg.id, done, total, "encoding"),
  });
  const checks = checker.finish({
    coverage: { ...selection, packed: total },
    derivations: composed.derivations,
    provenRange: composed.manifest.provenRange,
  });
  await setPackageProgress(ctx.db, pkg.id, total, total, "storing");
  return { selection, composed, checks, inputs };
}

/** What the package takes, which has to be the devices that it was numbered for. @throws AppError `package.devices_changed` */
async function select(db: Ctx["db"], pkg: PackageRow, { layout }: PackageInputs): Promise<Selection> {
  const { familyRevisionId } = pkg;
  const selection = await chooseSets(db, pkg.lotId, { order: layout.document.order, familyRevisionId });
  if (serialsSha256(selection.packed) === countsOf(pkg).serialsSha256) return selection;
  const message = "Other devices have approved coefficients than when the build was asked for; build again.";
  throw new AppError("package.devices_changed", { message });
}

async function store(ctx: Ctx, pkg: PackageRow, { selection, composed, checks, inputs }: Built): Promise<void> {
  const { images, values, manifestBytes, digest, sums, derivations } = composed;
  await ctx.db.transaction().execute(async (trx) => {
    await lockLot(trx, pkg.lotId);
    if ((await lockPackage(trx, pkg.id)).state !== "building") return;
    const now = await select(trx, pkg, inputs);
    if (setsSha256(now.packed) !== setsSha256(selection.packed)) {
      const message = "Coefficients were decided or withdrawn while the package was built; build again.";
      throw new AppError("package.sets_changed", { message });
    }
    await insertImages(trx, pkg.id, images);
    const file = { "manifest.json": manifestBytes, "images.jsonl": values, SHA256SUMS: sums };
    for (const [name, content] of Object.entries(file)) {
      await insertPackageFile(trx, pkg.id, { name, content, sha256: Buffer.from(sha256Hex(content), "hex") });
    }
    await insertPackageDerivations(
      trx,
      pkg.id,
      derivations.map((one) => one.id),
    );
    await insertChecks(
      trx,
      pkg.id,
      checks.map((check) => ({ ...check, evidence: check.evidence as Json })),
    );
    await addMakersOf(ctx, trx, pkg.id, derivations);
    const counts = countSelection(selection);
    await finishPackage(trx, pkg.id, {
      state: "draft",
      digest: Buffer.from(digest, "hex"),
      counts: counts as unknown as Json,
      failure: null,
      builtAt: ctx.now(),
    });
    await appendEvent(ctx, trx, {
      action: "package.built",
      subject: pkg.id,
      data: {
        lot: pkg.lotCode,
        version: pkg.version,
        digest,
        devices: counts.devices,
        leftOut: counts.leftOut,
        derivations: derivations.map((one) => one.id),
        checks: Object.fromEntries(checks.map((check) => [check.code, check.verdict])),
      },
    });
  });
}

/** Whoever made one of the derivations has a hand in the package too (contract, section 6). */
async function addMakersOf(
  ctx: Ctx,
  trx: Trx,
  packageId: string,
  derivations: readonly { id: string }[],
): Promise<void> {
  const makers = new Map<string, { personId: string; act: MakerAct }>();
  for (const { id } of derivations) {
    for (const { personId, act } of await listMakers(trx, "derivation", id)) {
      makers.set(`${personId} ${act}`, { personId, act: act as MakerAct });
    }
  }
  const subject = { subjectKind: "package" as const, subjectId: packageId, at: ctx.now() };
  await insertMakers(
    trx,
    [...makers.values()].map((maker) => ({ ...maker, ...subject, id: ctx.newId() })),
  );
}

function failureOf({ code, message, details }: AppError): BuildFailure {
  const { serial, field } = details;
  return {
    code,
    message,
    ...(typeof serial === "string" && { serial }),
    ...(typeof field === "string" && { field }),
  };
}

async function fail(ctx: Ctx, pkg: PackageRow, error: AppError): Promise<void> {
  const failure = failureOf(error);
  await ctx.db.transaction().execute(async (trx) => {
    if ((await lockPackage(trx, pkg.id)).state !== "building") return;
    await finishPackage(trx, pkg.id, {
      state: "failed",
      digest: null,
      counts: pkg.counts as Json,
      failure: failure as unknown as Json,
      builtAt: ctx.now(),
    });
    const { code, serial, field } = failure;
    await appendEvent(ctx, trx, {
      action: "package.build-failed",
      subject: pkg.id,
      data: { lot: pkg.lotCode, version: pkg.version, code, ...(serial && { serial }), ...(field && { field }) },
    });
  });
}
