import { VERIFY_COMMANDS } from "@/builders/bundle/verify-text";
import { getFamilyRevision } from "@/db/queries/families";
import { getLayoutById } from "@/db/queries/layouts";
import { listLivePeriods } from "@/db/queries/live-periods";
import { listPackageDerivationIds } from "@/db/queries/package-inputs";
import { listEventsOfSubjects, listPackageFiles } from "@/db/queries/package-provenance";
import { getPackage, type PackageRow } from "@/db/queries/packages";
import { listRunEquipment, listRunsById } from "@/db/queries/runs";
import type { Ctx } from "@/lib/services/context";
import { getDerivationView } from "@/lib/services/derivations/get-derivation";
import { listSignatures } from "@/lib/services/families/publishing";

/** Where a package comes from, all of it by digest; for people's eyes. */
export type PackageProvenance = Awaited<ReturnType<typeof getPackageProvenance>>;

/** The commands of `VERIFY.txt`, for showing them beside a package. */
export const verifyCommands = VERIFY_COMMANDS;

const time = (at: Date | null) => at?.toISOString() ?? null;

/** What a package was made from, by whom, and what became of it. @throws AppError `package.not_found` */
export async function getPackageProvenance(ctx: Ctx, id: string) {
  const row = await getPackage(ctx.db, id);
  const derivationIds = await listPackageDerivationIds(ctx.db, row.id);
  const derivations = [];
  for (const derivation of derivationIds) derivations.push(await derivationOf(ctx, derivation));
  return {
    family: await familyOf(ctx, row),
    layout: await layoutOf(ctx, row),
    derivations,
    releases: await listReleases(ctx, row),
    files: (await listPackageFiles(ctx.db, row.id)).map((file) => ({ ...file, sha256: file.sha256.toString("hex") })),
    events: (await listEventsOfSubjects(ctx.db, [row.id])).map((event) => ({
      ...event,
      at: event.at.toISOString(),
      hash: event.hash.toString("hex"),
    })),
  };
}

async function familyOf(ctx: Ctx, row: PackageRow) {
  const revision = await getFamilyRevision(ctx.db, row.familyRevisionId);
  return {
    code: row.familyCode,
    revision: revision.number,
    sha256: revision.sha256.toString("hex"),
    publishedAt: time(revision.publishedAt),
    ...(await listSignatures(ctx.db, "family-revision", revision.id)),
  };
}

async function layoutOf(ctx: Ctx, row: PackageRow) {
  const layout = await getLayoutById(ctx.db, row.layoutId);
  return {
    version: layout.version,
    sha256: layout.sha256.toString("hex"),
    publishedAt: time(layout.publishedAt),
    ...(await listSignatures(ctx.db, "layout", layout.id)),
  };
}

async function derivationOf(ctx: Ctx, id: string) {
  const view = await getDerivationView(ctx, id);
  const ids = view.runs.map((run) => run.id);
  const equipment = await listRunEquipment(ctx.db, ids);
  const runs = (await listRunsById(ctx.db, ids)).map((run) => ({
    id: run.id,
    purpose: run.purpose,
    sha256: run.sha256.toString("hex"),
    rows: run.rowCount,
    devices: run.deviceCount,
    supersededBy: run.supersededById,
    uploadedBy: run.createdByName,
    uploadedAt: run.createdAt.toISOString(),
    equipment: equipment.filter((one) => one.runId === run.id),
  }));
  return {
    id,
    state: view.state,
    method: view.method,
    order: view.order,
    engine: view.engine,
    sha256: view.sha256,
    provenRange: view.provenRange,
    exclude: view.exclude,
    approvals: view.approvals,
    acknowledgements: view.acknowledgements,
    runs,
  };
}

/** The withdrawal of a package; undefined where it was not withdrawn. @throws AppError `package.not_found` */
export async function findWithdrawal(ctx: Ctx, id: string) {
  const releases = await listReleases(ctx, await getPackage(ctx.db, id));
  return releases.find((one) => one.kind === "withdrawal");
}

/** Every change of what is live that names the package, oldest first. */
async function listReleases(ctx: Ctx, row: { id: string; lotId: string }) {
  const periods = await listLivePeriods(ctx.db, row.lotId);
  return periods
    .filter((period) => period.packageId === row.id)
    .map((period) => ({
      sequence: period.sequence,
      kind: period.kind,
      reason: period.reason,
      by: period.personName,
      at: period.startedAt.toISOString(),
      keyId: period.keyId,
    }));
}
