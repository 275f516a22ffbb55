import type { z } from "zod";
import { type ListedDeviceRow, listDevices } from "@/db/queries/devices";
import { getFamily } from "@/db/queries/families";
import { getLot as getLotRow, type LotSummaryRow, listLots as listLotRows } from "@/db/queries/lots";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { lot, lotDevice, lotQuery } from "@/schemas/api/lots";

export type LotView = z.output<typeof lot>;
export type LotDeviceView = z.output<typeof lotDevice>;
export type LotQuery = z.output<typeof lotQuery>;

/** Lots, newest first. @throws AppError `family.not_found` for an unknown family in the filter */
export async function listLots(ctx: Ctx, filter: LotQuery): Promise<Page<LotView>> {
  const { family, q, state, limit, cursor } = filter;
  const familyId = family === undefined ? undefined : (await getFamily(ctx.db, family)).id;
  const rows = await listLotRows(ctx.db, { familyId, q, state, before: cursor, limit: limit + 1 });
  return pageOf(rows.map(viewOf), limit, (row) => row.id);
}

/** A lot with its state and number of devices. @throws AppError `lot.not_found` */
export async function getLot(ctx: Ctx, codeOrId: string): Promise<LotView> {
  const { id } = await getLotRow(ctx.db, codeOrId);
  const [row] = await listLotRows(ctx.db, { id, limit: 1 });
  if (!row) throw new AppError("lot.not_found", { lot: codeOrId });
  return viewOf(row);
}

function viewOf(row: LotSummaryRow): LotView {
  const { id, code, firmware, sequence, state, devices } = row;
  const made = { createdAt: row.createdAt.toISOString(), createdBy: row.createdByName };
  return {
    id,
    code,
    family: row.familyCode,
    revision: row.revisionNumber,
    firmware,
    sequence,
    state,
    devices,
    ...made,
  };
}

/** A lot's devices by serial. @throws AppError `lot.not_found` */
export async function listLotDevices(
  ctx: Ctx,
  input: { lot: string; limit: number; cursor?: string; q?: string },
): Promise<Page<LotDeviceView>> {
  const { id } = await getLotRow(ctx.db, input.lot);
  const rows = await listDevices(ctx.db, id, { after: input.cursor, limit: input.limit + 1, q: input.q });
  return pageOf(rows.map(deviceViewOf), input.limit, (row) => row.serial);
}

function deviceViewOf(row: ListedDeviceRow): LotDeviceView {
  const state = row.scrapped ? "scrapped" : row.held ? "held" : row.shipped ? "shipped" : "active";
  const coefficients = row.coefficients as LotDeviceView["coefficients"];
  const { serial, hardwareId, gaugeBatch, materialBatch } = row;
  return { serial, state, coefficients, hardwareId, gaugeBatch, materialBatch, addedAt: row.addedAt.toISOString() };
}
