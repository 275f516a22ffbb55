/** One named stretch of the memory as the map draws it. */
export interface MapPart {
  name: string;
  at: number;
  length: number;
  /** Tint by what it holds; `tintOfSource` tells it from a field's source. */
  tint: "identity" | "version" | "temperature" | "zero" | "gain" | "checksum" | "other" | "kept";
  /** The bytes are text. */
  isText?: boolean;
  /** Inclusive ranges that a checksum covers. */
  over?: readonly (readonly [number, number])[];
  /** JSON pointer of the part in the layout document. */
  path?: string;
}

export interface MapRow {
  at: number;
  parts: readonly MapPart[];
  empty: boolean;
  /** How many rows of the memory this one stands for; more than one for a run of unused ones. */
  rows: number;
}

export interface MapCell {
  at: number;
  length: number;
  part?: MapPart;
  /** The part began in a row above. */
  continued: boolean;
  /** Another part claims the same bytes. */
  overlap: boolean;
}

const cells = 16;

/** The tint of a field by its source, as `coefficients.zeroTc`; constants and unknown ones are `other`. */
export function tintOfSource(source: string | undefined): MapPart["tint"] {
  if (source === undefined) return "other";
  if (source === "device.serial" || source === "lot.code") return "identity";
  if (/^(layout|package)\./.test(source)) return "version";
  if (/temp|referenceTemperature/i.test(source)) return "temperature";
  if (source.startsWith("coefficients.zero")) return "zero";
  if (source.startsWith("coefficients.gain")) return "gain";
  return "other";
}

/** Rows of sixteen bytes; neighbouring rows without any part are drawn as one. */
export function mapRows(bytes: number, parts: readonly MapPart[]): MapRow[] {
  const rows: MapRow[] = [];
  for (let at = 0; at < bytes; at += cells) {
    const inRow = parts.filter((part) => part.at < at + cells && part.at + part.length > at);
    const last = rows.at(-1);
    if (inRow.length === 0 && last?.empty) last.rows += 1;
    else rows.push({ at, parts: inRow, empty: inRow.length === 0, rows: 1 });
  }
  return rows;
}

/**
 * Cells of a row from left to right, sixteen columns in all. Of two parts that claim a byte the first in order of
 * address keeps it, and both are marked.
 */
export function cellsOf(row: MapRow): MapCell[] {
  const result: MapCell[] = [];
  const end = row.at + cells;
  let next = row.at;
  for (const part of [...row.parts].sort((a, b) => a.at - b.at)) {
    const from = Math.max(part.at, next);
    const to = Math.min(part.at + part.length, end);
    const clash = part.at < next && part.at >= row.at;
    if (clash) markLast(result);
    if (to <= from) continue;
    if (from > next) result.push({ at: next, length: from - next, continued: false, overlap: false });
    result.push({ at: from, length: to - from, part, continued: part.at < row.at, overlap: clash });
    next = to;
  }
  if (next < end) result.push({ at: next, length: end - next, continued: false, overlap: false });
  return result;
}

function markLast(result: MapCell[]): void {
  const last = result.at(-1);
  if (last?.part) last.overlap = true;
}
