import { sql } from "kysely";
import type { Db } from "@/db/executor";
import type { Coefficients, DevicePoint } from "@/lib/domain/compensation/types";

/** What a device's drift is drawn from. */
export interface DriftPointsRow {
  serial: string;
  coefficients: Coefficients;
  points: DevicePoint[];
}

const PAGE = 5_000;

/**
 * Points and values of the devices of a derivation that have both and are not among those named, page by page: of a large lot
 * nobody wants all in memory.
 */
export async function* eachDriftPoints(
  db: Db,
  derivationId: string,
  except: readonly string[],
): AsyncGenerator<DriftPointsRow[]> {
  let after = "";
  for (;;) {
    const { rows } = await sql<DriftPointsRow>`
      select d.serial, c.detail -> 'points' as points,
             jsonb_build_object('tempOffset', c.temp_offset, 'tempSlope', c.temp_slope, 'zero', c.zero, 'zeroTc', c.zero_tc,
                                'zeroTc2', coalesce(c.zero_tc2, 0), 'gain', c.gain, 'gainTc', c.gain_tc,
                                'gainTc2', coalesce(c.gain_tc2, 0)) as coefficients
      from coefficient_set c join device d on d.id = c.device_id
      where c.derivation_id = ${derivationId}::uuid and c.gain is not null and d.serial > ${after}
        and not (d.serial = any(${except as string[]}::text[])) and jsonb_array_length(coalesce(c.detail -> 'points', '[]')) > 0
      order by d.serial limit ${PAGE}
    `.execute(db);
    if (rows.length > 0) yield rows;
    if (rows.length < PAGE) return;
    after = rows.at(-1)?.serial ?? "";
  }
}
