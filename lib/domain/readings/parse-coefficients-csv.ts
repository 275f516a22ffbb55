import { isUtf8 } from "node:buffer";
import { CsvError, parse } from "csv-parse/sync";
import type { RowError } from "@/lib/domain/compensation/run-checks";
import type { Coefficients } from "@/lib/domain/compensation/types";
import { readDecimal, readSerial } from "./read-cell";
import { RowErrorList } from "./row-error-list";

const FIRST_ORDER = ["tempOffset", "tempSlope", "zero", "zeroTc", "gain", "gainTc"] as const;
const SECOND_ORDER = ["zeroTc2", "gainTc2"] as const;
type ValueColumn = (typeof FIRST_ORDER)[number] | (typeof SECOND_ORDER)[number];

export interface ParsedCoefficients {
  order: 1 | 2;
  sets: { row: number; serial: string; coefficients: Coefficients }[];
  /** At most 200 of `errorCount`. */
  errors: RowError[];
  errorCount: number;
  /** Cells as they stand in the file, the header first, each with its line. */
  records: readonly { record: string[]; line: number }[];
}

/**
 * Reads a CSV of coefficients, `serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc[,zeroTc2,gainTc2]` in any order:
 * one row a device, strict decimal numbers, gain above 0. Order 2 where zeroTc2 and gainTc2 are there.
 */
export function parseCoefficientsCsv(bytes: Buffer): ParsedCoefficients {
  const errors = new RowErrorList();
  const sets: ParsedCoefficients["sets"] = [];
  const records = readRecords(bytes, errors);
  const [header, ...rows] = records;
  const columns = header ? readHeader(header.record, errors) : undefined;
  const order = columns?.includes("zeroTc2") ? 2 : 1;
  const seen = new Map<string, number>();
  for (const { record, line } of columns ? rows : []) {
    const set = readSet(record, columns as string[], line, errors);
    if (!set) continue;
    const earlier = seen.get(set.serial);
    if (earlier !== undefined) {
      const message = `${set.serial} stands in row ${earlier} already.`;
      errors.add({ row: line, column: "serial", code: "coefficients.serial_repeated", message });
    } else sets.push({ row: line, ...set });
    seen.set(set.serial, earlier ?? line);
  }
  if (errors.total === 0 && sets.length === 0) {
    errors.add({ row: 1, column: "", code: "file.empty", message: "The file has no row with values." });
  }
  return { order, sets, errors: errors.list(), errorCount: errors.total, records };
}

function readRecords(bytes: Buffer, errors: RowErrorList): { record: string[]; line: number }[] {
  if (!isUtf8(bytes)) {
    errors.add({ row: 1, column: "", code: "file.not_utf8", message: "The file is not UTF-8; save it as UTF-8." });
    return [];
  }
  const records: { record: string[]; line: number }[] = [];
  try {
    parse(bytes, {
      bom: true,
      relax_column_count: true,
      skip_empty_lines: true,
      record_delimiter: ["\r\n", "\n", "\r"],
      max_record_size: 16 * 1024,
      on_record: (record: string[], { lines }) => {
        records.push({ record: record.map((cell) => cell.trim()), line: lines });
        return null;
      },
    });
  } catch (error) {
    if (!(error instanceof CsvError)) throw error;
    const message = "The line is too long, or a quotation mark is out of place.";
    errors.add({ row: Number(error.lines) || 1, column: "", code: "file.quotes_wrong", message });
  }
  return records;
}

function readHeader(names: readonly string[], errors: RowErrorList): string[] | undefined {
  const before = errors.total;
  const add = (column: string, code: string, message: string) => errors.add({ row: 1, column, code, message });
  const known = ["serial", ...FIRST_ORDER, ...SECOND_ORDER] as string[];
  for (const [index, name] of names.entries()) {
    const shown = name.slice(0, 64);
    if (!known.includes(name))
      add(shown, "column.unknown", `Column "${shown}" is not known; known are ${known.join(", ")}.`);
    else if (names.indexOf(name) !== index) add(shown, "column.repeated", `Column ${shown} is there twice.`);
  }
  const second = SECOND_ORDER.some((name) => names.includes(name));
  for (const name of ["serial", ...FIRST_ORDER, ...(second ? SECOND_ORDER : [])]) {
    if (!names.includes(name)) add(name, "column.missing", `Column ${name} is missing.`);
  }
  return errors.total > before ? undefined : [...names];
}

function readSet(cells: readonly string[], columns: readonly string[], line: number, errors: RowErrorList) {
  if (cells.length !== columns.length) {
    const message = `The row has ${cells.length} cells, the header ${columns.length}.`;
    errors.add({ row: line, column: "", code: "row.cells_wrong", message });
    return undefined;
  }
  const before = errors.total;
  const values: Partial<Record<ValueColumn, number>> = {};
  let serial: string | undefined;
  for (const [index, column] of columns.entries()) {
    const text = cells[index] as string;
    if (column === "serial") {
      serial = readSerial(text);
      if (serial === undefined) {
        errors.add({
          row: line,
          column,
          code: "reading.serial_invalid",
          message: "Takes 1 to 32 of A–Z, 0–9, dot, hyphen and underscore.",
        });
      }
      continue;
    }
    const value = readDecimal(text);
    if (value === undefined)
      errors.add({ row: line, column, code: "reading.not_a_number", message: "Takes a decimal number." });
    else if (column === "gain" && value <= 0) {
      errors.add({ row: line, column, code: "coefficients.gain_not_positive", message: "Takes a gain above 0." });
    } else values[column as ValueColumn] = value;
  }
  if (serial === undefined || errors.total > before) return undefined;
  return { serial, coefficients: values as Coefficients };
}
