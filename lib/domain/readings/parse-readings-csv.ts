import { isUtf8 } from "node:buffer";
import { type CsvError, parse } from "csv-parse";
import type { RowError } from "@/lib/domain/compensation/run-checks";
import type { Reading } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";
import { type Column, isColumn, OPTIONAL_COLUMNS, REQUIRED_COLUMNS } from "./columns";
import { type PartialRow, readRow } from "./read-row";
import { RowErrorList } from "./row-error-list";

/** Bounds of one upload. */
export const FILE_MAX_BYTES = 64 * 1024 * 1024;
export const ROWS_MAX = 600_000;
/** Longest line: the known columns need less than 1 kB. */
const LINE_MAX_BYTES = 64 * 1024;
const CHUNK_BYTES = 256 * 1024;

export interface ParsedReadings {
  readings: Reading[];
  /** What is wrong, by line of the file; at most 200 of `errorCount`. */
  errors: RowError[];
  errorCount: number;
  /** What could be read of the rows that are wrong: other rows of that serial and point can't be judged for missing ones. */
  badRows: PartialRow[];
}

/**
 * Reads a readings CSV (contract, section 2): UTF-8 with or without a byte order mark, columns in any order, strict
 * decimal numbers, RFC 3339 times, serials upper-cased. Feeds the parser in pieces, so that a large file does not hold
 * up everything else in the process.
 * @param bytes the file as uploaded.
 * @throws AppError `run.too_many_rows` {rowsMax}
 */
export async function parseReadingsCsv(bytes: Buffer): Promise<ParsedReadings> {
  const errors = new RowErrorList();
  const readings: Reading[] = [];
  const badRows: PartialRow[] = [];
  const done = () => ({ readings, errors: errors.list(), errorCount: errors.total, badRows });
  if (!isUtf8(bytes)) {
    errors.add(encodingError(bytes));
    return done();
  }
  let columns: Column[] | undefined;
  let rows = 0;
  const take = (record: string[], line: number): void => {
    if (!columns) {
      columns = readHeader(record, errors);
      return;
    }
    rows++;
    if (rows > ROWS_MAX) throw tooManyRows();
    const row = readRow(record, columns, line, errors);
    if ("reading" in row) readings.push(row.reading);
    else badRows.push(row.partial);
  };
  await feed(bytes, take, () => columns?.length !== 0, errors);
  if (!columns && errors.total === 0) {
    errors.add({ row: 1, column: "", code: "file.empty", message: "The file has no header row." });
  }
  return done();
}

/** Runs the records of a file through `take` until it wants no more; what the CSV reader refuses is an error of its line. */
async function feed(
  bytes: Buffer,
  take: (record: string[], line: number) => void,
  wantsMore: () => boolean,
  errors: RowErrorList,
): Promise<void> {
  const parser = parse({
    bom: true,
    relax_column_count: true,
    skip_empty_lines: true,
    record_delimiter: ["\r\n", "\n", "\r"],
    max_record_size: LINE_MAX_BYTES,
    on_record: (record: string[], { lines }) => {
      if (wantsMore()) take(record, lines);
      return null;
    },
  });
  const ended = new Promise<void>((resolve, reject) => parser.once("end", resolve).once("error", reject));
  parser.resume();
  let failed = false;
  ended.catch(() => {
    failed = true;
  });
  for (let from = 0; from < bytes.length && !failed && wantsMore(); from += CHUNK_BYTES) {
    parser.write(bytes.subarray(from, from + CHUNK_BYTES));
    await new Promise(setImmediate);
  }
  if (!failed && wantsMore()) parser.end();
  else if (!failed) {
    parser.destroy();
    return;
  }
  await ended.catch((error: unknown) => {
    if (!isCsvError(error)) throw error;
    errors.add(csvError(error));
  });
}

function isCsvError(error: unknown): error is CsvError {
  return error instanceof Error && "code" in error && !(error instanceof AppError) && "lines" in error;
}

const tooManyRows = () =>
  new AppError("run.too_many_rows", {
    rowsMax: ROWS_MAX,
    message: `At most ${ROWS_MAX.toLocaleString("en")} rows are taken in one run; upload it as several runs.`,
  });

function csvError(error: CsvError): RowError {
  const row = Number(error.lines) || 1;
  if (error.code === "CSV_MAX_RECORD_SIZE") {
    const message = `The line is longer than ${LINE_MAX_BYTES.toLocaleString("en")} bytes: is a quotation mark not closed?`;
    return { row, column: "", code: "file.line_too_long", message };
  }
  const message = "A quotation mark is out of place: put a whole cell in quotation marks, or none of it.";
  return { row, column: "", code: "file.quotes_wrong", message };
}

function encodingError(bytes: Buffer): RowError {
  const utf16 = (bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff);
  const message = utf16
    ? "The file is in UTF-16; save it as UTF-8."
    : "Here is a byte that is not UTF-8; save the file as UTF-8.";
  return { row: utf16 ? 1 : firstBadLine(bytes), column: "", code: "file.not_utf8", message };
}

function firstBadLine(bytes: Buffer): number {
  let line = 1;
  for (let from = 0; from < bytes.length; line++) {
    const end = bytes.indexOf(0x0a, from);
    const to = end < 0 ? bytes.length : end;
    if (!isUtf8(bytes.subarray(from, to))) return line;
    from = to + 1;
  }
  return line;
}

/** @returns the columns in the file's order; empty where the header can't be used. */
function readHeader(record: readonly string[], errors: RowErrorList): Column[] {
  const names = record.map((name) => name.trim().toLowerCase());
  const before = errors.total;
  const add = (column: string, code: string, message: string) => errors.add({ row: 1, column, code, message });
  if (names.length === 1 && names[0]?.includes(";")) {
    add("", "file.separator", "Columns are separated by commas; the page's column mapping takes other separators.");
    return [];
  }
  for (const [index, name] of names.entries()) {
    const shown = name.slice(0, 64);
    if (!isColumn(name)) {
      const known = [...REQUIRED_COLUMNS, ...OPTIONAL_COLUMNS].join(", ");
      add(shown, "column.unknown", `Column ${index + 1}, "${shown}", is not known; known are ${known}.`);
    } else if (names.indexOf(name) !== index) add(shown, "column.repeated", `Column ${name} is there twice.`);
  }
  for (const name of REQUIRED_COLUMNS) {
    if (!names.includes(name)) add(name, "column.missing", `Column ${name} is missing.`);
  }
  return errors.total > before ? [] : (names as Column[]);
}
