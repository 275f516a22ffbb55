import { sql } from "kysely";
import type { Db } from "@/db/executor";

export interface PooledDeviationRow {
  lot: string;
  derivationId: string;
  /** Standard deviation of gainTc in the lot's sample, 1/K. */
  sd: number;
  n: number;
  at: Date;
}

/**
 * Scatter of gainTc in the samples of a family's lots, newest lot first: of each lot its newest pooled-gain derivation that
 * was not refused.
 */
export async function listPooledDeviations(
  db: Db,
  familyId: string,
  { exceptLotId, limit }: { exceptLotId: string; limit: number },
): Promise<PooledDeviationRow[]> {
  const { rows } = await sql<PooledDeviationRow>`
    select * from (
      select distinct on (t.id) t.code as lot, d.id as derivation_id, (d.pooled ->> 'sd')::float8 as sd, (d.pooled ->> 'n')::int as n,
             d.created_at as at
      from derivation d join lot t on t.id = d.lot_id
      where t.family_id = ${familyId}::uuid and t.id <> ${exceptLotId}::uuid and d.method = 'pooled-gain'
        and d.state in ('proposed', 'approved', 'partly-approved') and d.pooled ->> 'sd' is not null
      order by t.id, d.created_at desc, d.id desc
    ) newest order by at desc, lot limit ${limit}
  `.execute(db);
  return rows;
}
