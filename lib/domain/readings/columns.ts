/** Columns of the readings CSV (contract, section 2). */
export const REQUIRED_COLUMNS = [
  "serial",
  "point",
  "chamber_c",
  "soak_min",
  "device_temp",
  "load_kg",
  "signal_mv_v",
  "taken_at",
] as const;

export const OPTIONAL_COLUMNS = ["position", "hardware_id", "dwell_s", "output_mv_v"] as const;

export type Column = (typeof REQUIRED_COLUMNS)[number] | (typeof OPTIONAL_COLUMNS)[number];

const KNOWN: ReadonlySet<string> = new Set<string>([...REQUIRED_COLUMNS, ...OPTIONAL_COLUMNS]);

/** Whether a header names a column of the readings CSV. */
export function isColumn(name: string): name is Column {
  return KNOWN.has(name);
}
