import { listApprovals } from "@/db/queries/approvals";
import { countVerdicts, listChecks, listWaivers } from "@/db/queries/checks";
import { getFamilyRevision } from "@/db/queries/families";
import { getLayoutById } from "@/db/queries/layouts";
import { findNewestPeriod, findNewestRelease, listNewestSequences } from "@/db/queries/live-periods";
import { getLot } from "@/db/queries/lots";
import { listMakers, type MakerRow } from "@/db/queries/makers";
import { listPackageDerivationIds } from "@/db/queries/package-inputs";
import { listReviewers } from "@/db/queries/package-provenance";
import { findLivePackage, getPackage, listPackages as listRows, type PackageRow } from "@/db/queries/packages";
import { listPersonNames } from "@/db/queries/person-names";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { PageQuery } from "@/schemas/api/common";
import type { PackageSummary, PackageView } from "@/schemas/api/packages";
import { countsOf } from "./package-counts";
import { reviewDigestOf } from "./review-digest";

const hex = (bytes: Buffer | null | undefined) => bytes?.toString("hex") ?? null;
const time = (at: Date | null | undefined) => at?.toISOString() ?? null;

type Verdicts = PackageSummary["checks"];
const NO_VERDICTS: Verdicts = { pass: 0, warn: 0, fail: 0 };

/** A package with all that stands about it. @throws AppError `package.not_found` */
export async function getPackageView(ctx: Ctx, id: string): Promise<PackageView> {
  const { db } = ctx;
  const row = await getPackage(db, id);
  const checks = await listChecks(db, id);
  const makers = await listMakers(db, "package", id);
  const names = await listPersonNames(db, [row.createdBy, row.submittedBy]);
  const revision = await getFamilyRevision(db, row.familyRevisionId);
  const layout = await getLayoutById(db, row.layoutId);
  const live = await findLivePackage(db, row.lotId);
  const verdicts = { ...NO_VERDICTS };
  for (const check of checks) verdicts[check.verdict]++;
  return {
    ...summaryOf(row, verdicts, (await findNewestPeriod(db, id))?.sequence ?? null, names),
    revision: revision.number,
    layoutSha256: layout.sha256.toString("hex"),
    reviewDigest: hex(await currentReviewDigest(ctx, row)),
    against: live && live.id !== id ? { id: live.id, version: live.version, digest: hex(live.digest) as string } : null,
    checks: checks.map((check) => ({ ...check, evidence: check.evidence as Record<string, unknown> })),
    waivers: (await listWaivers(db, id)).map(({ checkCode, personName, reason, at }) => ({
      check: checkCode,
      by: personName,
      reason,
      at: at.toISOString(),
    })),
    approvals: await decisionsOf(ctx, id),
    makers: makers.map(({ name, act, at }) => ({ name, act, at: at.toISOString() })),
    progress: { done: row.progressDone, total: row.progressTotal, step: row.progressStep },
    failure: row.failure as PackageView["failure"],
    rebuild: row.rebuild as PackageView["rebuild"],
    derivations: await listPackageDerivationIds(db, id),
    submittedBy: row.submittedBy === null ? null : (names.get(row.submittedBy) ?? ""),
    liveSince: row.state === "live" ? time((await findNewestRelease(db, id))?.startedAt) : null,
    ...(await rightsOf(ctx, row, makers)),
  };
}

/** What a decision would be over now; once decided, what it was over. */
async function currentReviewDigest(ctx: Ctx, row: PackageRow): Promise<Buffer | null> {
  if (row.state !== "draft" && row.state !== "in-review") return row.reviewDigest;
  return (await reviewDigestOf(ctx.db, row)).reviewDigest;
}

async function decisionsOf(ctx: Ctx, id: string): Promise<PackageView["approvals"]> {
  return (await listApprovals(ctx.db, "package", id)).map(({ decision, personName, meaning, reason, digest, at }) => ({
    decision: decision as "approve" | "refuse",
    name: personName,
    meaning,
    reason,
    digest: hex(digest),
    at: at.toISOString(),
  }));
}

async function rightsOf({ db, actor }: Ctx, row: PackageRow, makers: readonly MakerRow[]) {
  const makerIds = new Set(makers.map((maker) => maker.personId));
  const reviewers = (await listReviewers(db)).filter((person) => !makerIds.has(person.id));
  const person = actor.kind === "person" ? actor : undefined;
  const isMaker = person !== undefined && makerIds.has(person.id);
  const isEngineer = person?.roles.includes("engineer") ?? false;
  return {
    isMaker,
    mayDecide: (person?.roles.includes("reviewer") ?? false) && !isMaker,
    mayTakeBack:
      isEngineer && (row.state === "approved" || (row.state === "in-review" && row.submittedBy === person?.id)),
    reviewers: reviewers.map((one) => one.name),
  };
}

function summaryOf(
  row: PackageRow,
  checks: Verdicts,
  sequence: number | null,
  names: ReadonlyMap<string, string>,
): PackageSummary {
  const { devices, lotDevices, leftOut } = countsOf(row);
  return {
    id: row.id,
    lot: row.lotCode,
    family: row.familyCode,
    version: row.version,
    state: row.state,
    digest: hex(row.digest),
    layout: row.layoutVersion,
    firmware: row.firmware,
    counts: { devices, lotDevices, leftOut: leftOut as Record<string, number> },
    checks,
    sequence,
    notes: row.notes,
    createdAt: row.createdAt.toISOString(),
    createdBy: names.get(row.createdBy) ?? "",
    builtAt: time(row.builtAt),
    submittedAt: time(row.submittedAt),
    approvedAt: time(row.approvedAt),
  };
}

/** A lot's packages, newest first. @throws AppError `lot.not_found` */
export async function listLotPackages(ctx: Ctx, lot: string, page: PageQuery): Promise<Page<PackageSummary>> {
  const { id: lotId } = await getLot(ctx.db, lot);
  const rows = await listRows(ctx.db, lotId, { limit: page.limit + 1, ...(page.cursor && { cursor: page.cursor }) });
  const { items, next } = pageOf(rows, page.limit, (row) => row.id);
  const ids = items.map((row) => row.id);
  const verdicts = await countVerdicts(ctx.db, ids);
  const sequences = await listNewestSequences(ctx.db, ids);
  const names = await listPersonNames(
    ctx.db,
    items.map((row) => row.createdBy),
  );
  const summaries = items.map((row) =>
    summaryOf(row, { ...NO_VERDICTS, ...verdicts.get(row.id) }, sequences.get(row.id) ?? null, names),
  );
  return { items: summaries, next };
}
