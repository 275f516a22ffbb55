import type { z } from "zod";
import {
  type FamilyRevisionRow,
  type FamilySummaryRow,
  getFamily as findFamilyRow,
  listFamilyRevisions,
  listFamilies as listFamilyRows,
} from "@/db/queries/families";
import { listPersonNames } from "@/db/queries/person-names";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { familyReply, familyRevisionReply, familySummary } from "@/schemas/api/families";
import { listSignatures } from "./publishing";

export type FamilySummary = z.output<typeof familySummary>;
export type FamilyRevisionView = z.output<typeof familyRevisionReply>;
export type FamilyView = z.output<typeof familyReply>;

/** Families by code, with the values of the newest revision and counts. */
export async function listFamilies(ctx: Ctx, page: { limit: number; cursor?: string }): Promise<Page<FamilySummary>> {
  const rows = await listFamilyRows(ctx.db, { limit: page.limit + 1, after: page.cursor });
  return pageOf(rows.map(summaryOf), page.limit, (row) => row.code);
}

function summaryOf(row: FamilySummaryRow): FamilySummary {
  const { id, code, document, newestRevision, state, revision, layouts, lots, createdAt } = row;
  const { name, capacityKg, nominalMvV, accuracyClass, intervals } = document;
  const values = { name, capacityKg, nominalMvV, accuracyClass, intervals };
  return { id, code, ...values, revision, newestRevision, state, layouts, lots, createdAt: createdAt.toISOString() };
}

/** A family with all its revisions, newest first. @throws AppError `family.not_found` */
export async function getFamily(ctx: Ctx, codeOrId: string): Promise<FamilyView> {
  const { id } = await findFamilyRow(ctx.db, codeOrId);
  const [row] = await listFamilyRows(ctx.db, { id, limit: 1 });
  if (!row) throw new AppError("family.not_found", { family: codeOrId });
  const revisions = await listFamilyRevisions(ctx.db, id);
  const names = await listPersonNames(
    ctx.db,
    revisions.flatMap((revision) => [revision.createdBy, revision.submittedBy]),
  );
  const views = await Promise.all(revisions.map((revision) => viewOf(ctx, row.code, revision, names)));
  return { ...summaryOf(row), revisions: views };
}

/** One revision of a family. @throws AppError `family.not_found`, `family-revision.not_found` */
export async function getFamilyRevisionView(ctx: Ctx, codeOrId: string, number: number): Promise<FamilyRevisionView> {
  const found = (await getFamily(ctx, codeOrId)).revisions.find((revision) => revision.number === number);
  if (!found) throw new AppError("family-revision.not_found", { revision: number });
  return found;
}

async function viewOf(
  ctx: Ctx,
  code: string,
  row: FamilyRevisionRow,
  names: Map<string, string>,
): Promise<FamilyRevisionView> {
  const { decisions, makers } = await listSignatures(ctx.db, "family-revision", row.id);
  const time = (at: Date | null) => at?.toISOString() ?? null;
  return {
    id: row.id,
    code,
    revision: row.number,
    number: row.number,
    state: row.state,
    sha256: row.sha256.toString("hex"),
    document: { ...row.document },
    createdAt: row.createdAt.toISOString(),
    createdBy: names.get(row.createdBy) ?? "",
    submittedAt: time(row.submittedAt),
    submittedBy: row.submittedBy === null ? null : (names.get(row.submittedBy) ?? ""),
    publishedAt: time(row.publishedAt),
    retiredAt: time(row.retiredAt),
    makers,
    decisions,
  };
}
