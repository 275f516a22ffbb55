import { CsvError, parse } from "csv-parse/browser/esm/sync";
import { AppError } from "@/lib/errors";
import { ROWS_MAX } from "./gather-readings";
import { COLUMNS_MAX, type GivenRow } from "./given-table";

export const DELIMITERS = [",", ";", "\t"] as const;
export type Delimiter = (typeof DELIMITERS)[number];

/** Longest row in characters: the known columns need less than 1,000. */
const ROW_MAX_CHARACTERS = 64 * 1024;
const PIECE_CHARACTERS = 1024 * 1024;

/** The sign that stands most often in the first line outside quotation marks; a comma where none does. */
export function sniffDelimiter(text: string): Delimiter {
  const line = /^[\r\n]*([^\r\n]{0,65536})/.exec(text)?.[1]?.replace(/"[^"]*"/g, "") ?? "";
  const count = (sign: string) => line.split(sign).length;
  return (["\t", ";", ","] as const).reduce((best, sign) => (count(sign) > count(best) ? sign : best), ",");
}

/**
 * The rows of a text with delimiters, read piece by piece; rows without any content are left out.
 * @returns an iteration that gives what it read so far, from 0 to 1, after every piece, and the rows at its end
 * @throws AppError `table.quotes_wrong` {line}, `table.row_too_long` {line}, `table.too_many_columns` {line},
 * `run.too_many_rows`
 */
export function* readDelimited(
  text: string,
  delimiter: Delimiter,
  pieceLength = PIECE_CHARACTERS,
): Generator<number, GivenRow[]> {
  const rows: GivenRow[] = [];
  let line = 0;
  for (let from = 0; from < text.length; ) {
    const to = endOfPiece(text, from, pieceLength);
    for (const cells of parsePiece(text.slice(from, to), delimiter, line)) {
      const start = line + 1;
      line += 1 + cells.reduce((sum, cell) => sum + (cell.match(/\r\n|\n|\r/g)?.length ?? 0), 0);
      if (cells.every((cell) => cell.trim() === "")) continue;
      assertShape(cells, start, rows.length);
      rows.push({ line: start, cells });
    }
    from = to;
    yield from / text.length;
  }
  return rows;
}

function parsePiece(piece: string, delimiter: Delimiter, linesBefore: number): string[][] {
  try {
    return parse(piece, {
      delimiter,
      relax_column_count: true,
      record_delimiter: ["\r\n", "\n", "\r"],
      max_record_size: ROW_MAX_CHARACTERS,
    });
  } catch (error) {
    if (!(error instanceof CsvError)) throw error;
    const line = linesBefore + (Number(error.lines) || 1);
    if (error.code === "CSV_MAX_RECORD_SIZE") {
      const message = `Row ${line} is longer than ${ROW_MAX_CHARACTERS.toLocaleString("en")} characters: is a quotation mark not closed?`;
      throw new AppError("table.row_too_long", { line, message });
    }
    const message = `A quotation mark is out of place in row ${line}: put a whole cell in quotation marks, or none of it.`;
    throw new AppError("table.quotes_wrong", { line, message });
  }
}

/** @throws AppError `table.too_many_columns` {line}, `run.too_many_rows` {rowsMax} */
export function assertShape(cells: readonly string[], line: number, rowsBefore: number): void {
  if (cells.length > COLUMNS_MAX) {
    const message = `Row ${line} has more than ${COLUMNS_MAX} columns: that is no table of readings, or its delimiter is another one.`;
    throw new AppError("table.too_many_columns", { line, message });
  }
  if (rowsBefore <= ROWS_MAX) return;
  const message = `At most ${ROWS_MAX.toLocaleString("en")} rows are taken in one run; upload it as several runs.`;
  throw new AppError("run.too_many_rows", { rowsMax: ROWS_MAX, message });
}

/** Behind a line break with an even number of quotation marks before it, so outside a cell. */
function endOfPiece(text: string, from: number, pieceLength: number): number {
  let open = false;
  for (let counted = from, search = from + pieceLength; search < text.length; ) {
    const feed = text.indexOf("\n", search);
    const at = feed < 0 ? text.indexOf("\r", search) : feed;
    if (at < 0) return text.length;
    for (let mark = text.indexOf('"', counted); mark >= 0 && mark < at; mark = text.indexOf('"', mark + 1))
      open = !open;
    if (!open) return at + 1;
    counted = at;
    search = at + 1;
  }
  return text.length;
}
