import { type Column, OPTIONAL_COLUMNS, REQUIRED_COLUMNS } from "./columns";

/** A table as somebody's reader or spreadsheet wrote it. */
export interface GivenTable {
  headers: string[];
  rows: string[][];
}

/** Place of each of our columns in the given table. */
export type ColumnMap = Partial<Record<Column, number>>;

export interface MapOptions {
  /** Numbers are written with a decimal comma. */
  decimalComma: boolean;
  /** Offset of times that name none, `Z` or `+01:00`; empty where all of them name theirs. */
  offset: string;
}

export const ALL_COLUMNS: readonly Column[] = [...REQUIRED_COLUMNS, ...OPTIONAL_COLUMNS];
const TEXTS: ReadonlySet<Column> = new Set<Column>(["serial", "taken_at", "position", "hardware_id"]);

const plain = (name: string) =>
  name
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, "_")
    .replace(/^_|_$/g, "");

/** Columns whose names are ours but for case, blanks and signs. */
export function suggestMap(headers: readonly string[]): ColumnMap {
  const names = headers.map(plain);
  const map: ColumnMap = {};
  for (const column of ALL_COLUMNS) {
    const at = names.indexOf(column);
    if (at >= 0) map[column] = at;
  }
  return map;
}

/** Our columns that have to be there and have no place yet. */
export function missingColumns(map: ColumnMap): Column[] {
  return REQUIRED_COLUMNS.filter((column) => map[column] === undefined);
}

const LOCAL_TIME = /^(\d{4}-\d{2}-\d{2})[T ](\d{2}:\d{2})(:\d{2}(?:\.\d+)?)?$/;
const DAY_MS = 86_400_000;
/** Day 0 of spreadsheets' serial dates, so that day 60 and later are right (ECMA-376, 18.17.4.1). */
const SHEET_EPOCH_MS = Date.UTC(1899, 11, 30);

function timeOf(text: string, offset: string): string {
  const days = /^\d{5}(\.\d+)?$/.test(text) ? Number(text) : undefined;
  const written =
    days === undefined
      ? text
      : new Date(Math.round((SHEET_EPOCH_MS + days * DAY_MS) / 1000) * 1000).toISOString().slice(0, 19);
  const parts = LOCAL_TIME.exec(written);
  return parts ? `${parts[1]}T${parts[2]}${parts[3] ?? ":00"}${offset}` : written;
}

function cellOf(column: Column, given: string, { decimalComma, offset }: MapOptions): string {
  const text = given.trim();
  if (column === "taken_at") return timeOf(text, offset);
  if (TEXTS.has(column) || !decimalComma) return text;
  // One comma and no point is a decimal comma; anything else is left for the check to refuse.
  return /^[^.,]*,[^.,]*$/.test(text) ? text.replace(",", ".") : text;
}

const quote = (text: string) => (/[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text);

/** The given table as a readings CSV; rows without any content are left out. What is wrong in a cell stays for the check to name. */
export function mapTable(table: GivenTable, map: ColumnMap, options: MapOptions): string {
  const columns = ALL_COLUMNS.filter((column) => map[column] !== undefined);
  const lines = table.rows
    .filter((row) => row.some((cell) => cell.trim() !== ""))
    .map((row) => columns.map((column) => quote(cellOf(column, row[map[column] as number] ?? "", options))).join(","));
  return `${[columns.join(","), ...lines].join("\n")}\n`;
}
