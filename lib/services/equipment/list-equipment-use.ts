import { getEquipment } from "@/db/queries/equipment";
import { listRunsOfEquipment } from "@/db/queries/equipment-use";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { PageQuery } from "@/schemas/api/common";
import type { EquipmentUse } from "@/schemas/api/equipment";

/** Runs that used a piece of equipment, newest first, with its certificate as of each. @throws AppError `equipment.not_found` */
export async function listEquipmentUse(ctx: Ctx, codeOrId: string, page: PageQuery): Promise<Page<EquipmentUse>> {
  const { id } = await getEquipment(ctx.db, codeOrId);
  const rows = await listRunsOfEquipment(ctx.db, id, { before: page.cursor, limit: page.limit + 1 });
  const uses = rows.map(({ runId, deviceCount, createdAt, ...row }) => ({
    ...row,
    run: runId,
    devices: deviceCount,
    createdAt: createdAt.toISOString(),
  }));
  return pageOf(uses, page.limit, (use) => use.run);
}
