import type { RowError } from "@/lib/domain/compensation/run-checks";
import type { Coefficients } from "@/lib/domain/compensation/types";
import { forEachInSteps, type Steps } from "@/lib/domain/steps";
import { type CoefficientRecord, readCoefficientRecords } from "./coefficient-records";
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
  records: readonly CoefficientRecord[];
}

/**
 * Reads a CSV of coefficients, `serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc[,zeroTc2,gainTc2]` in any order:
 * one row a device, strict decimal numbers, gain above 0. Order 2 where zeroTc2 and gainTc2 are there.
 * @param pieceBytes least length of what is parsed in a step.
 */
export function* parseCoefficientsCsv(bytes: Buffer, pieceBytes?: number): Steps<ParsedCoefficients> {
  const errors = new RowErrorList();
  const records = yield* readCoefficientRecords(bytes, errors, pieceBytes);
  const [header, ...rows] = records;
  const columns = header ? readHeader(header.record, errors) : undefined;
  const order = columns?.includes("zeroTc2") ? 2 : 1;
  const sets = columns ? yield* readSets(rows, columns, errors) : [];
  if (errors.total === 0 && sets.length === 0) {
    errors.add({ row: 1, column: "", code: "file.empty", message: "The file has no row with values." });
  }
  return { order, sets, errors: errors.list(), errorCount: errors.total, records };
}

/** The sets of all rows that hold one, each serial's first. */
function* readSets(rows: readonly CoefficientRecord[], columns: readonly string[], errors: RowErrorList) {
  const sets: ParsedCoefficients["sets"] = [];
  const seen = new Map<string, number>();
  yield* forEachInSteps(rows, ({ record, line }) => {
    const set = readSet(record, columns, line, errors);
    if (!set) return;
    const earlier = seen.get(set.serial);
    if (earlier === undefined) {
      sets.push({ row: line, ...set });
      seen.set(set.serial, line);
      return;
    }
    const message = `${set.serial} stands in row ${earlier} already.`;
    errors.add({ row: line, column: "serial", code: "coefficients.serial_repeated", message });
  });
  return sets;
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
