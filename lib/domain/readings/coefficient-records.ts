import { isUtf8 } from "node:buffer";
import { CsvError, parse } from "csv-parse/sync";
import type { Steps } from "@/lib/domain/steps";
import { csvPieces } from "./csv-records";
import type { RowErrorList } from "./row-error-list";

/** Longest record: a serial and eight numbers need less than 300 bytes. */
const RECORD_MAX_BYTES = 16 * 1024;

/** Cells without blanks around them, with the line on which the record ends; the file's first is 1. */
export interface CoefficientRecord {
  record: string[];
  line: number;
}

const OPTIONS = {
  relax_column_count: true,
  skip_empty_lines: true,
  record_delimiter: ["\r\n", "\n", "\r"],
  max_record_size: RECORD_MAX_BYTES,
};

/**
 * The records of a CSV of coefficients, piece by piece, up to the first that can't be told apart; blank lines are left out.
 * @param errors takes what keeps the file from being read on.
 */
export function* readCoefficientRecords(
  bytes: Buffer,
  errors: RowErrorList,
  pieceBytes?: number,
): Steps<CoefficientRecord[]> {
  if (!isUtf8(bytes)) {
    errors.add({ row: 1, column: "", code: "file.not_utf8", message: "The file is not UTF-8; save it as UTF-8." });
    return [];
  }
  const records: CoefficientRecord[] = [];
  let lines = 0;
  for (const piece of csvPieces(bytes, pieceBytes)) {
    try {
      lines += readPiece(piece, lines, records);
    } catch (error) {
      if (!(error instanceof CsvError)) throw error;
      const message = "The line is too long, or a quotation mark is out of place.";
      errors.add({ row: lines + (Number(error.lines) || 1), column: "", code: "file.quotes_wrong", message });
      break;
    }
    yield;
  }
  return records;
}

/** Adds the records of a piece that `before` lines precede. @returns how many lines it has */
function readPiece(piece: Buffer, before: number, records: CoefficientRecord[]): number {
  let last = { lines: 0, bytes: 0 };
  parse(piece, {
    ...OPTIONS,
    bom: before === 0,
    on_record: (record: string[], { lines, bytes }) => {
      records.push({ record: record.map((cell) => cell.trim()), line: before + lines });
      last = { lines, bytes };
      return null;
    },
  });
  // Behind the last record stand blank lines only.
  const blank = piece.toString("latin1", last.bytes).match(/\r\n|\n|\r/g) ?? [];
  return last.lines + blank.length;
}
