import { listApprovals } from "@/db/queries/approvals";
import { getLot } from "@/db/queries/lots";
import { getReinstatement, listReinstatements as listRows, type ReinstatementRow } from "@/db/queries/reinstatements";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { PageQuery } from "@/schemas/api/common";
import type { ReinstatementView } from "@/schemas/api/packages";

/** A request with its decision. @throws AppError `reinstatement.not_found` */
export async function getReinstatementView(ctx: Ctx, id: string): Promise<ReinstatementView> {
  return viewOf(ctx, await getReinstatement(ctx.db, id));
}

/** Requests of a lot to make an earlier release live again, newest first. @throws AppError `lot.not_found` */
export async function listLotReinstatements(ctx: Ctx, lot: string, page: PageQuery): Promise<Page<ReinstatementView>> {
  const { id } = await getLot(ctx.db, lot);
  const rows = await listRows(ctx.db, id, { limit: page.limit + 1, ...(page.cursor && { cursor: page.cursor }) });
  const { items, next } = pageOf(rows, page.limit, (row) => row.id);
  const views: ReinstatementView[] = [];
  for (const row of items) views.push(await viewOf(ctx, row));
  return { items: views, next };
}

async function viewOf({ db, actor }: Ctx, row: ReinstatementRow): Promise<ReinstatementView> {
  const approvals = await listApprovals(db, "reinstatement", row.id);
  return {
    id: row.id,
    lot: row.lotCode,
    package: row.packageId,
    version: row.version,
    reason: row.reason,
    state: row.state as ReinstatementView["state"],
    askedBy: row.askedByName,
    askedAt: row.askedAt.toISOString(),
    decidedAt: row.decidedAt?.toISOString() ?? null,
    approvals: approvals.map(({ decision, personName, meaning, reason, at }) => ({
      decision: decision as "approve" | "refuse",
      name: personName,
      meaning,
      reason,
      at: at.toISOString(),
    })),
    mayDecide:
      actor.kind === "person" && actor.roles.includes("reviewer") && actor.id !== row.askedBy && row.state === "asked",
  };
}
