import { type Column, OPTIONAL_COLUMNS, REQUIRED_COLUMNS } from "./columns";
import type { Delimiter } from "./delimited-text";
import type { Encoding } from "./encoding";
import type { CellKind, GivenRow } from "./given-table";

/** Place of each of our columns in the given table. */
export type ColumnMap = Partial<Record<Column, number>>;

export interface MapOptions {
  /** Numbers are written with a decimal comma. */
  decimalComma: boolean;
  /** Offset of times that name none, `Z` or `+01:00`; empty where all of them name theirs. */
  offset: string;
  /** The workbook counts its days from 1904. */
  days1904?: boolean;
}

/** How somebody's tables are read, as it is remembered for a family. */
export interface ReadingMapping extends Omit<MapOptions, "days1904"> {
  /** Name of the table's column for each of ours, as `columnNames` gives it. */
  columns: Partial<Record<Column, string>>;
  headerRow: boolean;
  encoding: Encoding | null;
  delimiter: Delimiter | null;
  sheet: string | null;
}

export const ALL_COLUMNS: readonly Column[] = [...REQUIRED_COLUMNS, ...OPTIONAL_COLUMNS];
const TEXTS: ReadonlySet<Column> = new Set<Column>(["serial", "taken_at", "position", "hardware_id"]);

/** Offset of local times: `Z`, or hours and minutes. */
export const OFFSET = /^(Z|[+-]([01]\d|2[0-3]):[0-5]\d)$/;

const plain = (name: string) =>
  name
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, "_")
    .replace(/^_|_$/g, "");

/** Columns whose names are ours but for case, blanks and signs. */
export function suggestMap(names: readonly string[]): ColumnMap {
  const known = names.map(plain);
  const map: ColumnMap = {};
  for (const column of ALL_COLUMNS) {
    const at = known.indexOf(column);
    if (at >= 0) map[column] = at;
  }
  return map;
}

/** A remembered mapping found in a table's names; undefined where one of its columns is not there. */
export function findMapping(columns: ReadingMapping["columns"], names: readonly string[]): ColumnMap | undefined {
  const map: ColumnMap = {};
  for (const column of ALL_COLUMNS) {
    const name = columns[column];
    if (name === undefined) continue;
    const at = names.indexOf(name);
    if (at < 0) return undefined;
    map[column] = at;
  }
  return map;
}

/** Our columns that have to be there and have no place yet. */
export function missingColumns(map: ColumnMap): Column[] {
  return REQUIRED_COLUMNS.filter((column) => map[column] === undefined);
}

/** Our columns that have a place, in the order in which they are written. */
export function mappedColumns(map: ColumnMap): Column[] {
  return ALL_COLUMNS.filter((column) => map[column] !== undefined);
}

const LOCAL_TIME = /^(\d{4}-\d{2}-\d{2})[T ](\d{2}:\d{2})(:\d{2}(?:\.\d+)?)?$/;
const SHEET_DAYS = /^\d{5}(\.\d+)?$/;
const DAY_MS = 86_400_000;
/** Day 0 of a workbook's dates, so that day 60 and later are right, and of one that counts from 1904 (ECMA-376-1, 18.17.4.1). */
const EPOCH_1900_MS = Date.UTC(1899, 11, 30);
const EPOCH_1904_MS = Date.UTC(1904, 0, 1);

/** Days of a workbook are told to the second: their fraction is a binary number. */
function timeOf(text: string, { offset, days1904 }: MapOptions): string {
  const epoch = days1904 ? EPOCH_1904_MS : EPOCH_1900_MS;
  const written = SHEET_DAYS.test(text)
    ? new Date(Math.round((epoch + Number(text) * DAY_MS) / 1000) * 1000).toISOString().slice(0, 19)
    : text;
  const parts = LOCAL_TIME.exec(written);
  return parts ? `${parts[1]}T${parts[2]}${parts[3] ?? ":00"}${offset}` : written;
}

function cellOf(column: Column, given: string, options: MapOptions): string {
  const text = given.trim();
  if (column === "taken_at") return timeOf(text, options);
  if (TEXTS.has(column) || !options.decimalComma) return text;
  // One comma and no point is a decimal comma; anything else is left for the check to refuse.
  return /^[^.,]*,[^.,]*$/.test(text) ? text.replace(",", ".") : text;
}

/** The cells of a row for the given columns. What is wrong in a cell stays for the check to name. */
export function mapRow(row: GivenRow, map: ColumnMap, columns: readonly Column[], options: MapOptions): string[] {
  return columns.map((column) => cellOf(column, row.cells[map[column] as number] ?? "", options));
}

const KIND_REFUSED: Partial<Record<CellKind, { code: string; message: string }>> = {
  formula: {
    code: "cell.formula",
    message: "A formula stands here, and its result may change: put the value in its place.",
  },
  fault: { code: "cell.fault", message: "The workbook shows an error value here." },
};
const NUMBER_FOR_TEXT = {
  code: "cell.number_for_text",
  message:
    "The workbook holds a number here: leading zeros and digits beyond the fifteenth are lost. Format the column as text and fill it again.",
};

/** Why a workbook's cell can't be taken for a column whatever it shows; undefined where its text decides. */
export function refusedKind(column: Column, kind: CellKind | undefined): { code: string; message: string } | undefined {
  if (kind === "number" && TEXTS.has(column) && column !== "taken_at") return NUMBER_FOR_TEXT;
  return kind === undefined ? undefined : KIND_REFUSED[kind];
}

/** A line of CSV (RFC 4180), without its end. */
export function csvLine(cells: readonly string[]): string {
  return cells.map((text) => (/[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text)).join(",");
}
