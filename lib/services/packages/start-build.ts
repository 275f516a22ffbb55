import semver from "semver";
import type { Trx } from "@/db/executor";
import { getLayout, type LayoutRow } from "@/db/queries/layouts";
import { getLot, type LotRow, lockLot } from "@/db/queries/lots";
import { insertMakers } from "@/db/queries/makers";
import { findHighestPackage, insertPackage } from "@/db/queries/packages";
import { isFirmwareOf } from "@/lib/domain/firmware-range";
import { numberPackage } from "@/lib/domain/package-number";
import type { Step } from "@/lib/domain/semver-step";
import { AppError } from "@/lib/errors";
import { enqueue } from "@/lib/jobs/enqueue";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { chooseSets, type Selection } from "./choose-sets";
import { countSelection, countsOf, type PackageCounts } from "./package-counts";

export interface BuildInput {
  /** Code or id. */
  lot: string;
  /** Version of a published layout of the lot's family. */
  layout: string;
  step?: Step | undefined;
  notes?: string | undefined;
}

export interface StartedBuild {
  id: string;
  version: string;
  state: "building";
}

/**
 * Numbers a lot's next package and hands its build to the worker.
 * @throws AppError `lot.not_found`, `layout.not_found`, `layout.not_published`, `layout.firmware_mismatch`,
 * `package.nothing_approved`; nothing is then written
 */
export async function startBuild(ctx: PersonCtx, input: BuildInput): Promise<StartedBuild> {
  assertRole(ctx, "engineer");
  const { id: lotId } = await getLot(ctx.db, input.lot);
  return ctx.db.transaction().execute(async (trx) => {
    const lot = await lockLot(trx, lotId);
    const layout = await getLayout(trx, lot.familyId, input.layout);
    assertLayoutFits(layout, lot);
    const { order } = layout.document;
    const selection = await chooseSets(trx, lot.id, { order, familyRevisionId: lot.familyRevisionId });
    assertSomethingApproved(selection);
    const counts = countSelection(selection);
    const version = await nextVersion(trx, lot, layout, counts, input.step);
    const id = await record(ctx, trx, { lot, layout, counts, version, notes: input.notes ?? "" });
    await enqueue(trx, "build-package", { packageId: id });
    await appendEvent(ctx, trx, {
      action: "package.build-started",
      subject: id,
      data: {
        lot: lot.code,
        version,
        layout: layout.version,
        layoutSha256: layout.sha256.toString("hex"),
        devices: counts.devices,
        ...(input.step !== undefined && { step: input.step }),
      },
      texts: { notes: input.notes },
    });
    return { id, version, state: "building" };
  });
}

function assertLayoutFits(layout: LayoutRow, lot: LotRow): void {
  if (layout.state !== "published") {
    const message = `Layout ${layout.version} is ${layout.state === "in-review" ? "in review" : layout.state}; choose a published one.`;
    throw new AppError("layout.not_published", { layout: layout.version, state: layout.state, message });
  }
  const { firmware } = layout.document;
  if (isFirmwareOf(lot.firmware, firmware)) return;
  const message = `Layout ${layout.version} is for firmware ${firmware}; lot ${lot.code} runs ${lot.firmware}.`;
  throw new AppError("layout.firmware_mismatch", {
    layout: layout.version,
    range: firmware,
    firmware: lot.firmware,
    message,
  });
}

function assertSomethingApproved(selection: Selection): void {
  if (selection.packed.length > 0) return;
  const { leftOut } = countSelection(selection);
  const message =
    "No device of the lot has approved coefficients that fit this layout; derive and have them approved first.";
  throw new AppError("package.nothing_approved", { leftOut, message });
}

async function nextVersion(
  trx: Trx,
  lot: LotRow,
  layout: LayoutRow,
  counts: PackageCounts,
  step: Step | undefined,
): Promise<string> {
  const highest = await findHighestPackage(trx, lot.id);
  const compared = await findHighestPackage(trx, lot.id, { except: ["failed"] });
  // The lists themselves are as good as their digests here: what is asked is only whether they are the same.
  const serials = (digest: string) => [digest];
  return numberPackage({
    highest: highest?.version ?? null,
    compared: compared
      ? {
          version: compared.version,
          layoutVersion: compared.layoutVersion,
          serials: serials(countsOf(compared).serialsSha256),
        }
      : null,
    next: { layoutVersion: layout.version, serials: serials(counts.serialsSha256) },
    step,
  });
}

interface NewPackage {
  lot: LotRow;
  layout: LayoutRow;
  counts: PackageCounts;
  version: string;
  notes: string;
}

async function record(ctx: PersonCtx, trx: Trx, { lot, layout, counts, version, notes }: NewPackage): Promise<string> {
  const id = ctx.newId();
  const at = ctx.now();
  await insertPackage(trx, {
    id,
    lotId: lot.id,
    layoutId: layout.id,
    familyRevisionId: lot.familyRevisionId,
    version,
    versionMajor: semver.major(version),
    versionMinor: semver.minor(version),
    versionPatch: semver.patch(version),
    firmware: lot.firmware,
    notes,
    state: "building",
    counts: JSON.stringify(counts),
    progressTotal: counts.devices,
    progressStep: "waiting",
    createdAt: at,
    createdBy: ctx.actor.id,
  });
  await insertMakers(trx, [
    { id: ctx.newId(), subjectKind: "package", subjectId: id, personId: ctx.actor.id, act: "built", at },
  ]);
  return id;
}
