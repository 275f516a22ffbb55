import { CsvError, parse } from "csv-parse/sync";

/** Longest record: the known columns need less than 1 kB. */
export const RECORD_MAX_BYTES = 64 * 1024;
/** What is parsed between two pauses: about 10 ms. */
const PIECE_BYTES = 64 * 1024;
const [LF, CR, QUOTE] = [0x0a, 0x0d, 0x22];

/** Why a file is no CSV, by line of the file. */
export interface CsvFault {
  line: number;
  reason: "record_too_long" | "quotes_wrong";
}

/**
 * Runs the records of a CSV through `take` until it wants no more; blank lines are left out. The file is read in pieces with a
 * pause after each, so that a large one does not hold up everything else in the process.
 * @param take gets the cells and the line on which the record ends, the first line being 1. @returns whether it wants more
 * @param pieceBytes least length of a piece.
 * @returns the first fault, undefined where every record could be told apart
 */
export async function readCsvRecords(
  bytes: Buffer,
  take: (record: string[], line: number) => boolean,
  pieceBytes = PIECE_BYTES,
): Promise<CsvFault | undefined> {
  let line = 0;
  for (const piece of csvPieces(bytes, pieceBytes)) {
    const quoted = piece.includes(QUOTE);
    let records: string[][];
    try {
      records = parse(piece, OPTIONS);
    } catch (error) {
      if (!(error instanceof CsvError)) throw error;
      const reason = error.code === "CSV_MAX_RECORD_SIZE" ? "record_too_long" : "quotes_wrong";
      return { line: line + (Number(error.lines) || 1), reason };
    }
    for (const record of records) {
      line += quoted ? 1 + lineBreaksIn(record) : 1;
      if (record.length === 1 && record[0] === "") continue;
      if (!take(record, line)) return undefined;
    }
    await new Promise(setImmediate);
  }
  return undefined;
}

const OPTIONS = {
  bom: true,
  relax_column_count: true,
  record_delimiter: ["\r\n", "\n", "\r"],
  max_record_size: RECORD_MAX_BYTES,
};

/**
 * Pieces that end between two records. A line break ends a record where the quotation marks before it are even in number; a mark
 * out of place would be met by the parser in the same piece or an earlier one.
 */
export function* csvPieces(bytes: Buffer, pieceBytes = PIECE_BYTES): Generator<Buffer> {
  const lineBreak = bytes.includes(LF) ? LF : CR;
  for (let from = 0; from < bytes.length; ) {
    const to = endOfPiece(bytes, from, from + pieceBytes, lineBreak);
    yield bytes.subarray(from, to);
    from = to;
  }
}

function endOfPiece(bytes: Buffer, from: number, earliest: number, lineBreak: number): number {
  let open = false;
  for (let counted = from, search = earliest; search < bytes.length; ) {
    const at = bytes.indexOf(lineBreak, search);
    if (at < 0) return bytes.length;
    for (let mark = bytes.indexOf(QUOTE, counted); mark >= 0 && mark < at; mark = bytes.indexOf(QUOTE, mark + 1)) {
      open = !open;
    }
    if (!open) return at + 1;
    counted = at;
    search = at + 1;
  }
  return bytes.length;
}

function lineBreaksIn(record: readonly string[]): number {
  return record.reduce((sum, cell) => sum + (cell.match(/\r\n|\n|\r/g)?.length ?? 0), 0);
}
