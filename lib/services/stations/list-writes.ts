import { getLot } from "@/db/queries/lots";
import { type ListedWrite, listWritesOfLot } from "@/db/queries/writes";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";

/** A write record as people and machines read it. */
export function writeView(row: ListedWrite) {
  return {
    id: row.id,
    counter: Number(row.counter),
    serial: row.serial,
    package: row.packageId,
    version: row.version,
    imageSha256: row.imageSha256.toString("hex"),
    readbackSha256: row.readbackSha256?.toString("hex") ?? null,
    outcome: row.outcome,
    flags: row.flags,
    station: row.station,
    operator: row.operator,
    detail: row.detail,
    hardwareId: row.hardwareId,
    startedAt: row.startedAt.toISOString(),
    finishedAt: row.finishedAt.toISOString(),
    receivedAt: row.receivedAt.toISOString(),
  };
}

export type WriteView = ReturnType<typeof writeView>;

/** Write records of a lot, newest received first. @throws AppError `lot.not_found` */
export async function listLotWrites(
  ctx: Ctx,
  input: { lot: string; limit: number; cursor?: string; outcome?: string },
): Promise<Page<WriteView>> {
  const lot = await getLot(ctx.db, input.lot);
  const rows = await listWritesOfLot(ctx.db, lot.id, { ...input, limit: input.limit + 1 });
  return pageOf(rows.map(writeView), input.limit, (row) => row.id);
}
