import type { z } from "zod";
import { getFamily } from "@/db/queries/families";
import { getLayout, type LayoutUseRow, listLayoutUses } from "@/db/queries/layouts";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { layoutUse } from "@/schemas/api/layouts";
import type { LayoutKey } from "./write-layout";

export type LayoutUse = z.output<typeof layoutUse>;

/** Lots with packages built from a layout, by code. @throws AppError `family.not_found`, `layout.not_found` */
export async function getLayoutUse(
  ctx: Ctx,
  input: LayoutKey & { limit: number; cursor?: string },
): Promise<Page<LayoutUse>> {
  const family = await getFamily(ctx.db, input.family);
  const { id } = await getLayout(ctx.db, family.id, input.version);
  const rows = await listLayoutUses(ctx.db, family.id, { layoutId: id, after: input.cursor, limit: input.limit + 1 });
  const page = pageOf(rows, input.limit, (row) => row.lot);
  return { items: page.items.map(summaryOf), next: page.next };
}

/** The same for all of a family's layouts, by layout id. @throws AppError `family.not_found` */
export async function listFamilyLayoutUses(ctx: Ctx, family: string): Promise<Map<string, LayoutUse[]>> {
  const { id } = await getFamily(ctx.db, family);
  const uses = new Map<string, LayoutUse[]>();
  for (const row of await listLayoutUses(ctx.db, id)) {
    uses.set(row.layoutId, [...(uses.get(row.layoutId) ?? []), summaryOf(row)]);
  }
  return uses;
}

function summaryOf({ lot, firmware, packages, underWay, liveId, liveVersion }: LayoutUseRow): LayoutUse {
  const live = liveId === null || liveVersion === null ? null : { id: liveId, version: liveVersion };
  return { lot, firmware, packages, underWay, live };
}
