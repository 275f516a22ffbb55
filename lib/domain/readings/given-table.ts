import { readDecimal } from "./read-cell";

/** What a workbook holds in a cell; a text file has texts only. */
export type CellKind = "text" | "number" | "formula" | "fault" | "yes-no";

/** A row as somebody's reader or spreadsheet wrote it. */
export interface GivenRow {
  /** Line of the text file, or the row's number in the sheet. */
  line: number;
  cells: string[];
  /** Left out where all cells are texts. */
  kinds?: CellKind[];
}

/** More columns than this are no table of readings. */
export const COLUMNS_MAX = 200;
const JUDGED_ROWS = 200;
const NAME_MAX = 120;
const DECIMAL_COMMA = /^\s*[+-]?\d+,\d+([eE][+-]?\d+)?\s*$/;

/** Whether the first row names columns: none of its cells is a number, and not all are empty. */
export function hasHeaderRow(rows: readonly GivenRow[]): boolean {
  const cells = rows[0]?.cells.map((cell) => cell.trim()) ?? [];
  const isNumber = (cell: string) => readDecimal(cell.replace(",", ".")) !== undefined;
  return cells.some((cell) => cell !== "") && !cells.some(isNumber);
}

/**
 * Names of the columns, each only once: as the first row has them, a second of the same name with its place; `#1`, `#2` … where no
 * row names them.
 */
export function columnNames(rows: readonly GivenRow[], headerRow: boolean): string[] {
  const width = rows.slice(0, JUDGED_ROWS).reduce((most, row) => Math.max(most, row.cells.length), 0);
  const names: string[] = [];
  for (let place = 0; place < width; place++) {
    const given = headerRow ? nameOf(rows[0]?.cells[place] ?? "") : "";
    const name = given === "" ? `#${place + 1}` : given;
    names.push(names.includes(name) ? `${name} (#${place + 1})` : name);
  }
  return names;
}

/** A header as a name: on one line, without control characters, of bounded length. */
function nameOf(cell: string): string {
  return cell
    .slice(0, NAME_MAX)
    .replace(/[\p{C}\s]+/gu, " ")
    .trim();
}

/** Whether numbers are written with a decimal comma, judged by the first rows. */
export function hasDecimalComma(rows: readonly GivenRow[]): boolean {
  return rows.slice(0, JUDGED_ROWS).some((row) => row.cells.some((cell) => DECIMAL_COMMA.test(cell)));
}
