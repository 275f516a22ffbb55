/** Reads, cuts and checks a file of readings beside the page, which stays usable meanwhile. Ending the worker cancels all of it. */
import { type CheckedTable, isReadingsCsv, TableCheck } from "@/lib/domain/readings/check-table";
import { readDelimited, sniffDelimiter } from "@/lib/domain/readings/delimited-text";
import { decodeText, sniffEncoding } from "@/lib/domain/readings/encoding";
import { columnNames, type GivenRow, hasDecimalComma, hasHeaderRow } from "@/lib/domain/readings/given-table";
import { isCompoundFile, isZip, openWorkbook, readSheet, type Workbook } from "@/lib/domain/readings/workbook";
import { AppError } from "@/lib/errors";
import type { Ask, Checked, CheckOptions, TableFacts, TableOptions, Tell } from "./worker-messages";

const FIRST_ROWS = 6;
const WRONG_ROWS = 50;
const ROWS_A_STEP = 5_000;
/** Reading the bytes is a small part of the work. */
const BYTES_SHARE = 0.1;

let bytes = new Uint8Array();
let workbook: Workbook | undefined;
let rows: GivenRow[] = [];
let facts: TableFacts | undefined;
let lines: number[] | undefined;
let newestCheck = 0;

const tell = (message: Tell) => postMessage(message);
const pause = () => new Promise((resolve) => setTimeout(resolve));
const progress = (step: "reading" | "checking", share: number) => tell({ tell: "progress", step, share });

addEventListener("message", ({ data }: MessageEvent<Ask>) => {
  answer(data).catch((error: unknown) => {
    // What is no refusal of ours is a fault of this page: the browser's console has it.
    if (!(error instanceof AppError)) console.error(error);
    const message =
      error instanceof AppError ? error.message : "The file can't be read here; something went wrong in this page.";
    tell({ tell: "failed", message });
  });
});

async function answer(ask: Ask): Promise<void> {
  if (ask.ask === "open") {
    bytes = await readBytes(ask.file);
    workbook = isZip(bytes) ? await openWorkbook(bytes) : undefined;
    await cut(ask);
  } else if (ask.ask === "reread") await cut(ask);
  else if (ask.ask === "check") await check(ask.id, ask.check);
  else tell({ tell: "rows", id: ask.id, rows: rowsSentAs(ask.sentRows) });
}

async function readBytes(file: File): Promise<Uint8Array<ArrayBuffer>> {
  const read = new Uint8Array(file.size);
  const reader = file.stream().getReader();
  for (let at = 0; ; ) {
    const { done, value } = await reader.read();
    if (done) return read;
    read.set(value, at);
    at += value.length;
    progress("reading", (BYTES_SHARE * at) / file.size);
  }
}

async function cut(options: TableOptions): Promise<void> {
  if (isCompoundFile(bytes)) {
    const message =
      "The workbook is protected by a password, or of the older kind (.xls): save it as XLSX without one, or as CSV.";
    throw new AppError("workbook.not_opened", { message });
  }
  const found = workbook ? await cutWorkbook(workbook, options) : await cutText(options);
  const headerRow = options.headerRow ?? hasHeaderRow(rows);
  if (rows.length <= (headerRow ? 1 : 0)) {
    throw new AppError("table.empty", { message: "There are no rows with readings in this file." });
  }
  const data = headerRow ? rows.slice(1) : rows;
  facts = {
    ...found,
    headerRow,
    names: columnNames(rows, headerRow),
    rows: data.length,
    first: data.slice(0, FIRST_ROWS),
    decimalComma: hasDecimalComma(data),
  };
  tell({ tell: "table", facts });
}

async function cutWorkbook(book: Workbook, { sheet: wanted }: TableOptions) {
  const sheet = book.sheets.find(({ name }) => name === wanted) ?? book.sheets[0];
  rows = sheet ? await readSheet(book, sheet, (share) => progress("reading", share)) : [];
  const sheets = book.sheets.map(({ name }) => name);
  return { encoding: null, delimiter: null, sheets, sheet: sheet?.name ?? null, days1904: book.days1904 };
}

async function cutText(options: TableOptions) {
  const encoding = options.encoding ?? sniffEncoding(bytes);
  const { text, badLine } = decodeText(bytes, encoding);
  if (text === undefined) {
    const message = `Row ${badLine} has bytes that ${encoding.toUpperCase()} does not have: choose another encoding, or save the file anew.`;
    throw new AppError("file.encoding_wrong", { line: badLine, message });
  }
  const delimiter = options.delimiter ?? sniffDelimiter(text);
  const reading = readDelimited(text, delimiter);
  for (;;) {
    const { done, value } = reading.next();
    if (done) {
      rows = value;
      return { encoding, delimiter, sheets: [], sheet: null, days1904: false };
    }
    progress("reading", BYTES_SHARE + (1 - BYTES_SHARE) * value);
    await pause();
  }
}

/** Checks all rows, some at a time; a newer check ends an older one. */
async function check(id: number, options: CheckOptions): Promise<void> {
  newestCheck = id;
  const table = new TableCheck(options.map, options.options);
  const data = facts?.headerRow ? rows.slice(1) : rows;
  for (let from = 0; from < data.length; from += ROWS_A_STEP) {
    for (const row of data.slice(from, from + ROWS_A_STEP)) table.take(row);
    progress("checking", (0.8 * from) / data.length);
    await pause();
    if (newestCheck !== id) return;
  }
  const result = table.done(options.rules, options.purpose);
  tell({ tell: "checked", id, checked: await checkedOf(result, table, options) });
}

async function checkedOf(result: CheckedTable, table: TableCheck, { map, options }: CheckOptions): Promise<Checked> {
  const asItIs = facts !== undefined && isReadingsCsv(facts, map, options);
  lines = asItIs ? undefined : table.lines;
  return {
    ...result,
    body: asItIs ? null : new Blob(table.csv, { type: "text/csv" }),
    sourceSha256: asItIs ? null : await digestOf(bytes),
    wrongRows: rowsAt(new Set(result.errors.slice(0, WRONG_ROWS).map((error) => error.row))),
  };
}

function rowsAt(wanted: ReadonlySet<number>): GivenRow[] {
  return wanted.size === 0 ? [] : rows.filter((row) => wanted.has(row.line));
}

function rowsSentAs(sentRows: readonly number[]): Record<number, GivenRow> {
  const lineOf = new Map(sentRows.map((sent) => [sent, lines ? lines[sent - 2] : sent]));
  const byLine = new Map(
    rowsAt(new Set([...lineOf.values()].filter((line) => line !== undefined))).map((row) => [row.line, row]),
  );
  const found: Record<number, GivenRow> = {};
  for (const [sent, line] of lineOf) {
    const row = line === undefined ? undefined : byLine.get(line);
    if (row) found[sent] = row;
  }
  return found;
}

/** Browsers hash on secure addresses only; elsewhere the file's digest is left out. */
async function digestOf(content: Uint8Array<ArrayBuffer>): Promise<string | null> {
  if (!globalThis.crypto?.subtle) return null;
  const digest = await crypto.subtle.digest("SHA-256", content);
  return [...new Uint8Array(digest)].map((byte) => byte.toString(16).padStart(2, "0")).join("");
}
