import { getLot } from "@/db/queries/lots";
import { getStation } from "@/db/queries/stations";
import { type ListedWrite, listWritesOfLot, listWritesOfStation, type WriteFilter } from "@/db/queries/writes";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";

function writeView(row: ListedWrite) {
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

/** A write record as people and machines read it. */
export type WriteView = ReturnType<typeof writeView>;

/** Write records of a lot, newest received first. @throws AppError `lot.not_found` */
export async function listLotWrites(ctx: Ctx, input: WriteFilter & { lot: string }): Promise<Page<WriteView>> {
  const lot = await getLot(ctx.db, input.lot);
  return pageOfWrites(await listWritesOfLot(ctx.db, lot.id, { ...input, limit: input.limit + 1 }), input.limit);
}

/** What a station reported, newest received first. @throws AppError `station.not_found` */
export async function listStationWrites(ctx: Ctx, input: WriteFilter & { station: string }): Promise<Page<WriteView>> {
  const station = await getStation(ctx.db, input.station);
  return pageOfWrites(await listWritesOfStation(ctx.db, station.id, { ...input, limit: input.limit + 1 }), input.limit);
}

const pageOfWrites = (rows: readonly ListedWrite[], limit: number): Page<WriteView> =>
  pageOf(rows.map(writeView), limit, (row) => row.id);
