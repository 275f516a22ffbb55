import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { DrawStratum } from "@/lib/domain/compensation/draw-sample";

export interface LeftOut {
  reason: string;
  count: number;
  /** The first of them. */
  serials: string[];
}

export interface SampleDrawRow {
  id: string;
  lotId: string;
  /** 32 hexadecimal digits. */
  seed: string;
  count: number;
  /** Devices that could be drawn. */
  eligible: number;
  serials: string[];
  strata: DrawStratum[];
  leftOut: LeftOut[];
  method: string;
  createdAt: Date;
  createdBy: string;
}

export type ListedSampleDrawRow = SampleDrawRow & { createdByName: string };

const columns = [
  "sampleDraw.id",
  "sampleDraw.lotId",
  "sampleDraw.seed",
  "sampleDraw.count",
  "sampleDraw.eligible",
  "sampleDraw.serials",
  "sampleDraw.strata",
  "sampleDraw.leftOut",
  "sampleDraw.method",
  "sampleDraw.createdAt",
  "sampleDraw.createdBy",
] as const;

/** Stores a draw. */
export async function insertSampleDraw(trx: Trx, draw: SampleDrawRow): Promise<void> {
  const { strata, leftOut, ...row } = draw;
  await trx
    .insertInto("sampleDraw")
    .values({ ...row, strata: JSON.stringify(strata), leftOut: JSON.stringify(leftOut) })
    .execute();
}

/** A lot's draws, newest first. */
export async function listSampleDraws(
  db: Db,
  lotId: string,
  { before, limit }: { before?: string; limit: number },
): Promise<ListedSampleDrawRow[]> {
  let query = db
    .selectFrom("sampleDraw")
    .innerJoin("person", "person.id", "sampleDraw.createdBy")
    .select([...columns, "person.name as createdByName"])
    .where("sampleDraw.lotId", "=", lotId)
    .orderBy("sampleDraw.id", "desc")
    .limit(limit);
  if (before !== undefined) query = query.where("sampleDraw.id", "<", before);
  return (await query.execute()) as unknown as ListedSampleDrawRow[];
}

export interface DrawableDeviceRow {
  serial: string;
  gaugeBatch: string | null;
  materialBatch: string | null;
  held: boolean;
  scrapped: boolean;
  shipped: boolean;
  /** In a sample or verification run that counts. */
  measured: boolean;
  /** In a sample or verification run that is planned. */
  planned: boolean;
}

/** A lot's devices by serial, with what speaks against drawing them. */
export async function listDrawableDevices(db: Db, lotId: string): Promise<DrawableDeviceRow[]> {
  const { rows } = await sql<DrawableDeviceRow>`
    with measured as (
      select distinct g.device_id from reading g join run r on r.id = g.run_id
      where r.lot_id = ${lotId}::uuid and r.purpose in ('sample', 'verification')
        and not exists (select 1 from run later where later.supersedes_id = r.id)
    ), planned as (
      select distinct d.device_id from run_plan_device d join run_plan p on p.id = d.plan_id
      where p.lot_id = ${lotId}::uuid and p.purpose in ('sample', 'verification') and p.state = 'planned'
    )
    select device.serial, device.gauge_batch, device.material_batch, device.held, device.scrapped, device.shipped,
           measured.device_id is not null as measured, planned.device_id is not null as planned
    from device left join measured on measured.device_id = device.id left join planned on planned.device_id = device.id
    where device.lot_id = ${lotId}::uuid order by device.serial
  `.execute(db);
  return rows;
}
