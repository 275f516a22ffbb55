import type { z } from "zod";
import { getFamily } from "@/db/queries/families";
import { getLayout as getLayoutRow, type LayoutRow, listLayouts as listLayoutRows } from "@/db/queries/layouts";
import { listPersonNames } from "@/db/queries/person-names";
import type { Ctx } from "@/lib/services/context";
import { listSignatures } from "@/lib/services/families/publishing";
import { type Page, pageOf } from "@/lib/services/page";
import type { layoutReply, layoutSummary } from "@/schemas/api/layouts";
import type { LayoutKey } from "./write-layout";

export type LayoutSummary = z.output<typeof layoutSummary>;
export type LayoutView = z.output<typeof layoutReply>;

/** A family's layouts, the newest written first. @throws AppError `family.not_found` */
export async function listLayouts(
  ctx: Ctx,
  input: { family: string; limit: number; cursor?: string },
): Promise<Page<LayoutSummary>> {
  const family = await getFamily(ctx.db, input.family);
  const rows = await listLayoutRows(ctx.db, family.id, { limit: input.limit + 1, before: input.cursor });
  const page = pageOf(rows, input.limit, (row) => row.id);
  const names = await listPersonNames(
    ctx.db,
    page.items.flatMap((row) => [row.createdBy, row.updatedBy, row.submittedBy]),
  );
  return { items: page.items.map((row) => summaryOf(row, family.code, names)), next: page.next };
}

/** A layout with its document, who wrote and who decided. @throws AppError `family.not_found`, `layout.not_found` */
export async function getLayout(ctx: Ctx, key: LayoutKey): Promise<LayoutView> {
  const family = await getFamily(ctx.db, key.family);
  const row = await getLayoutRow(ctx.db, family.id, key.version);
  const names = await listPersonNames(ctx.db, [row.createdBy, row.updatedBy, row.submittedBy]);
  const { decisions, makers } = await listSignatures(ctx.db, "layout", row.id);
  const written = {
    draft: row.draftNumber,
    unfinished: row.unfinished,
    document: { ...row.document },
    source: row.source,
  };
  return { ...summaryOf(row, family.code, names), ...written, makers, decisions };
}

function summaryOf(row: LayoutRow, family: string, names: Map<string, string>): LayoutSummary {
  const { firmware, order, memory } = row.document;
  const time = (at: Date | null) => at?.toISOString() ?? null;
  return {
    id: row.id,
    family,
    version: row.version,
    state: row.state,
    firmware,
    order,
    bytes: memory.bytes,
    sha256: row.sha256.toString("hex"),
    step: row.step as LayoutSummary["step"],
    createdAt: row.createdAt.toISOString(),
    createdBy: names.get(row.createdBy) ?? "",
    updatedAt: row.updatedAt.toISOString(),
    updatedBy: names.get(row.updatedBy) ?? "",
    submittedAt: time(row.submittedAt),
    submittedBy: row.submittedBy === null ? null : (names.get(row.submittedBy) ?? ""),
    publishedAt: time(row.publishedAt),
    retiredAt: time(row.retiredAt),
  };
}
