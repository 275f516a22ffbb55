import type { RowError } from "@/lib/domain/compensation/run-checks";
import type { Reading } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";
import { type Column, isColumn, OPTIONAL_COLUMNS, REQUIRED_COLUMNS } from "./columns";
import { type PartialRow, type RowRules, readRow, rulesFor, shownCell } from "./read-row";
import { RowErrorList } from "./row-error-list";

/** Most rows of one run. */
export const ROWS_MAX = 600_000;

export interface ParsedReadings {
  readings: Reading[];
  /** What is wrong, by line of the file; at most 200 of `errorCount`. */
  errors: RowError[];
  errorCount: number;
  /** What could be read of the rows that are wrong: other rows of that serial and point can't be judged for missing ones. */
  badRows: PartialRow[];
}

/** Takes a table of readings record by record, the header first, and keeps what they say or what is wrong with them. */
export class ReadingsGatherer {
  readonly errors = new RowErrorList();
  private readonly readings: Reading[] = [];
  private readonly badRows: PartialRow[] = [];
  private rules: RowRules | undefined;

  /**
   * @param line of the file, the header being 1.
   * @returns whether further records make sense: not under a header that can't be used
   * @throws AppError `run.too_many_rows` {rowsMax}
   */
  take(record: readonly string[], line: number): boolean {
    if (!this.rules) {
      this.rules = rulesFor(readHeader(record, this.errors));
      return this.rules.length > 0;
    }
    if (this.readings.length + this.badRows.length >= ROWS_MAX) throw tooManyRows();
    const row = readRow(record, this.rules, line, this.errors);
    if ("reading" in row) this.readings.push(row.reading);
    else this.badRows.push(row.partial);
    return true;
  }

  /** Leaves a row out of which nothing can be told and which is named as wrong elsewhere. */
  skip(): void {
    this.badRows.push({});
  }

  done(): ParsedReadings {
    if (!this.rules && this.errors.total === 0) {
      this.errors.add({ row: 1, column: "", code: "file.empty", message: "The file has no header row." });
    }
    const { readings, badRows, errors } = this;
    return { readings, badRows, errors: errors.list(), errorCount: errors.total };
  }
}

const tooManyRows = () =>
  new AppError("run.too_many_rows", {
    rowsMax: ROWS_MAX,
    message: `At most ${ROWS_MAX.toLocaleString("en")} rows are taken in one run; upload it as several runs.`,
  });

/** @returns the columns in the file's order; empty where the header can't be used. */
function readHeader(record: readonly string[], errors: RowErrorList): Column[] {
  const names = record.map((name) => name.trim().toLowerCase());
  const before = errors.total;
  const add = (column: string, code: string, message: string) => errors.add({ row: 1, column, code, message });
  if (names.length === 1 && names[0]?.includes(";")) {
    add("", "file.separator", "Columns are separated by commas; the page's column mapping takes other separators.");
    return [];
  }
  const seen = new Set<string>();
  for (const [index, name] of names.entries()) {
    const shown = shownCell(name);
    if (!isColumn(name)) {
      const known = [...REQUIRED_COLUMNS, ...OPTIONAL_COLUMNS].join(", ");
      add(shown, "column.unknown", `Column ${index + 1}, "${shown}", is not known; known are ${known}.`);
    } else if (seen.has(name)) add(shown, "column.repeated", `Column ${name} is there twice.`);
    seen.add(name);
  }
  for (const name of REQUIRED_COLUMNS) {
    if (!seen.has(name)) add(name, "column.missing", `Column ${name} is missing.`);
  }
  return errors.total > before ? [] : (names as Column[]);
}
