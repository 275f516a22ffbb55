import { getLot } from "@/db/queries/lots";
import { listReadingsPage } from "@/db/queries/readings";
import {
  getRun,
  getRunFile,
  listRunEquipment,
  listRunFindings,
  listRunsOfLot,
  type RunEquipmentRow,
  type RunFindingRow,
  type RunRow,
} from "@/db/queries/runs";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { PageQuery } from "@/schemas/api/common";
import type { RunView } from "@/schemas/api/runs";

/** A run with equipment and findings. @throws AppError `run.not_found` */
export async function getRunView(ctx: Ctx, id: string): Promise<RunView> {
  const row = await getRun(ctx.db, id);
  return viewOf(row, await listRunEquipment(ctx.db, [id]), await listRunFindings(ctx.db, [id]));
}

/** A lot's runs, newest first. @throws AppError `lot.not_found` */
export async function listLotRuns(ctx: Ctx, lot: string, page: PageQuery): Promise<Page<RunView>> {
  const { id } = await getLot(ctx.db, lot);
  const found = await listRunsOfLot(ctx.db, id, { before: page.cursor, limit: page.limit + 1 });
  const { items, next } = pageOf(found, page.limit, (row) => row.id);
  const ids = items.map((row) => row.id);
  const equipment = await listRunEquipment(ctx.db, ids);
  const findings = await listRunFindings(ctx.db, ids);
  return { items: items.map((row) => viewOf(row, equipment, findings)), next };
}

/** The bytes of a run as uploaded, with its digest. @throws AppError `run.not_found` */
export async function getRunBytes(ctx: Ctx, id: string): Promise<{ run: RunRow; bytes: Buffer }> {
  return { run: await getRun(ctx.db, id), bytes: await getRunFile(ctx.db, id) };
}

/** A run's readings by row of the file. @throws AppError `run.not_found`, `request.invalid` for a cursor that is no row */
export async function listRunReadings(ctx: Ctx, id: string, page: PageQuery & { serial?: string }) {
  const afterRow = Number(page.cursor ?? 0);
  if (!Number.isInteger(afterRow) || afterRow < 0 || afterRow > 2_000_000_000) {
    throw new AppError("request.invalid", { message: "The cursor is not one of this list." });
  }
  await getRun(ctx.db, id);
  const rows = await listReadingsPage(ctx.db, id, { afterRow, limit: page.limit + 1, serial: page.serial });
  const readings = rows.map(
    ({ runId, position = null, hardwareId = null, dwellS = null, outputMvV = null, ...rest }) => ({
      ...rest,
      position,
      hardwareId,
      dwellS,
      outputMvV,
    }),
  );
  return pageOf(readings, page.limit, (reading) => String(reading.row));
}

function viewOf(row: RunRow, equipment: readonly RunEquipmentRow[], findings: readonly RunFindingRow[]): RunView {
  return {
    id: row.id,
    lot: row.lotCode,
    purpose: row.purpose,
    sha256: row.sha256.toString("hex"),
    sourceSha256: row.sourceSha256?.toString("hex") ?? null,
    bytes: row.byteCount,
    rows: row.rowCount,
    devices: row.deviceCount,
    fileName: row.fileName,
    temperatureLowC: row.temperatureLowC,
    temperatureHighC: row.temperatureHighC,
    supersedes: row.supersedesId,
    supersededBy: row.supersededById,
    reason: row.reason,
    plan: row.planId === null ? null : { id: row.planId, name: row.planName ?? "" },
    createdAt: row.createdAt.toISOString(),
    createdBy: row.createdByName,
    equipment: equipment.filter(({ runId }) => runId === row.id),
    findings: findings.filter(({ runId }) => runId === row.id),
  };
}
