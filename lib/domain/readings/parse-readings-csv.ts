import { isUtf8 } from "node:buffer";
import type { RowError } from "@/lib/domain/compensation/run-checks";
import { type CsvFault, RECORD_MAX_BYTES, readCsvRecords } from "./csv-records";
import { type ParsedReadings, ReadingsGatherer } from "./gather-readings";

/** Bound of one upload. */
export const FILE_MAX_BYTES = 64 * 1024 * 1024;
/** No CSV has a NUL; in UTF-16 every other byte of plain letters is one. */
const NUL_SEARCHED_BYTES = 1024;
const ZIP_START = Buffer.from("PK\u0003\u0004");

/**
 * Reads a readings CSV (contract, section 2): UTF-8 with or without a byte order mark, columns in any order, strict
 * decimal numbers, RFC 3339 times, serials upper-cased.
 * @param bytes the file as uploaded.
 * @throws AppError `run.too_many_rows` {rowsMax}
 */
export async function parseReadingsCsv(bytes: Buffer): Promise<ParsedReadings> {
  const gatherer = new ReadingsGatherer();
  const encoding = encodingError(bytes);
  if (encoding) gatherer.errors.add(encoding);
  else {
    const fault = await readCsvRecords(bytes, (record, line) => gatherer.take(record, line));
    if (fault) gatherer.errors.add(faultError(fault));
  }
  return gatherer.done();
}

function faultError({ line: row, reason }: CsvFault): RowError {
  if (reason === "record_too_long") {
    const message = `The line is longer than ${RECORD_MAX_BYTES.toLocaleString("en")} bytes: is a quotation mark not closed?`;
    return { row, column: "", code: "file.line_too_long", message };
  }
  const message = "A quotation mark is out of place: put a whole cell in quotation marks, or none of it.";
  return { row, column: "", code: "file.quotes_wrong", message };
}

function encodingError(bytes: Buffer): RowError | undefined {
  if (bytes.subarray(0, 4).equals(ZIP_START)) {
    const message =
      "The file is a workbook or another zip; only CSV is taken here. The page of the lot's readings takes XLSX.";
    return { row: 1, column: "", code: "file.not_csv", message };
  }
  const marked = (bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff);
  if (marked || bytes.subarray(0, NUL_SEARCHED_BYTES).includes(0)) {
    return { row: 1, column: "", code: "file.not_utf8", message: "The file is in UTF-16; save it as UTF-8." };
  }
  if (isUtf8(bytes)) return undefined;
  const message = "Here is a byte that is not UTF-8; save the file as UTF-8.";
  return { row: firstBadLine(bytes), column: "", code: "file.not_utf8", message };
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
