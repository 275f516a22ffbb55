import { sql } from "kysely";
import { float8Array, textArray, uuidArray } from "@/db/binary-arrays";
import type { Trx } from "@/db/executor";
import type { SetRole } from "@/db/queries/coefficients";
import { slicesOf } from "@/db/slices";
import type { Coefficients } from "@/lib/domain/compensation/types";

export interface NewSet {
  id: string;
  deviceId: string;
  role: SetRole;
  coefficients: Coefficients | null;
  /** What stands beside the values: residuals, uncertainty, points, ratios (DeviceResult without values and findings). */
  detail: unknown;
}

/** Sets that a statement takes: those of a derivation carry a kilobyte or two of points beside their values. */
const SETS_A_STATEMENT = 1_000;

/** Stores the sets of a derivation, proposed where there are values, column by column through `unnest`. */
export async function insertSets(trx: Trx, derivationId: string, sets: readonly NewSet[], at: Date): Promise<void> {
  for (const some of slicesOf(sets, SETS_A_STATEMENT)) await insertStatement(derivationId, some, at).execute(trx);
}

function insertStatement(derivationId: string, sets: readonly NewSet[], at: Date) {
  // A zero is stored without a sign, as decimal text has it.
  const values = (name: keyof Coefficients) =>
    float8Array(sets.map(({ coefficients }) => unsigned(coefficients?.[name])));
  return sql`
    insert into coefficient_set (id, derivation_id, device_id, role, state, temp_offset, temp_slope, zero, zero_tc, zero_tc2,
      gain, gain_tc, gain_tc2, detail, created_at, state_changed_at)
    select unnest(${uuidArray(sets.map((set) => set.id))}::uuid[]), ${derivationId}::uuid,
      unnest(${uuidArray(sets.map((set) => set.deviceId))}::uuid[]),
      unnest(${textArray(sets.map((set) => set.role))}::text[]),
      unnest(${textArray(sets.map((set) => (set.coefficients ? "proposed" : null)))}::text[]),
      unnest(${values("tempOffset")}::float8[]), unnest(${values("tempSlope")}::float8[]),
      unnest(${values("zero")}::float8[]), unnest(${values("zeroTc")}::float8[]), unnest(${values("zeroTc2")}::float8[]),
      unnest(${values("gain")}::float8[]), unnest(${values("gainTc")}::float8[]), unnest(${values("gainTc2")}::float8[]),
      unnest(${textArray(sets.map((set) => JSON.stringify(set.detail)))}::text[])::jsonb,
      ${at}::timestamptz, ${at}::timestamptz
  `;
}

const unsigned = (value: number | undefined) => (value === undefined ? null : value + 0);
