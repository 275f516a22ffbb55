import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** When each device of a lot was first verified, in rising order: with any package, or with the one named. */
export async function listFirstVerified(db: Db, lotId: string, packageId?: string): Promise<Date[]> {
  const { rows } = await sql<{ at: Date }>`
    select min(w.finished_at) as at
    from device d join write_record w on w.device_id = d.id
    where d.lot_id = ${lotId}::uuid and w.outcome = 'verified'
      and (${packageId ?? null}::uuid is null or w.package_id = ${packageId ?? null}::uuid)
    group by d.id order by at
  `.execute(db);
  return rows.map((row) => new Date(row.at));
}

export interface WriteCounts {
  records: number;
  /** Records that ended otherwise than verified. */
  otherwise: number;
  flagged: number;
  stations: number;
}

/** What stations reported about a lot, counted. */
export async function countWrites(db: Db, lotId: string): Promise<WriteCounts> {
  const { rows } = await sql<WriteCounts>`
    select count(*)::int as records, (count(*) filter (where w.outcome <> 'verified'))::int as otherwise,
           (count(*) filter (where w.flags <> '{}'))::int as flagged, count(distinct w.station_id)::int as stations
    from device d join write_record w on w.device_id = d.id where d.lot_id = ${lotId}::uuid
  `.execute(db);
  return rows[0] as WriteCounts;
}
