import { isColumn, REQUIRED_COLUMNS } from "@/lib/domain/readings/columns";
import type { GivenTable } from "@/lib/domain/readings/map-table";

export type { GivenTable };

const HEADER_BYTES = 4096;

/** Whether a file has the header of a readings CSV, and so needs no mapping. */
export async function isReadingsCsv(file: File): Promise<boolean> {
  const start = await file.slice(0, HEADER_BYTES).text();
  const header = start.replace(/^\uFEFF/, "").split(/\r\n|\n|\r/, 1)[0] ?? "";
  const names = header.split(",").map((name) => name.trim().replace(/^"|"$/g, "").toLowerCase());
  return names.every(isColumn) && REQUIRED_COLUMNS.every((column) => names.includes(column));
}

/**
 * Reads a spreadsheet's first sheet or a text with separated columns.
 * @throws Error with words for the reader
 */
export async function readTable(file: File): Promise<GivenTable> {
  const bytes = new Uint8Array(await file.arrayBuffer());
  const isZip = bytes[0] === 0x50 && bytes[1] === 0x4b;
  const [headers, ...rows] = isZip ? await readSheet(bytes) : await readText(bytes);
  if (!headers || rows.length === 0) throw new Error("There is no header row with rows under it.");
  return { headers, rows };
}

async function readText(bytes: Uint8Array): Promise<string[][]> {
  const { parse } = await import("csv-parse/browser/esm/sync");
  const text = decode(bytes);
  const first = text.split(/\r\n|\n|\r/, 1)[0] ?? "";
  const count = (sign: string) => first.split(sign).length;
  const delimiter = [";", "\t", ","].reduce((best, sign) => (count(sign) > count(best) ? sign : best));
  try {
    return parse(text, { bom: true, delimiter, relax_column_count: true, skip_empty_lines: true });
  } catch (cause) {
    throw new Error("A quotation mark is out of place, so that the columns can't be told apart.", { cause });
  }
}

/** UTF-8, or the encoding that office programs of Western languages write where it is not. */
function decode(bytes: Uint8Array): string {
  try {
    return new TextDecoder("utf-8", { fatal: true }).decode(bytes);
  } catch {
    return new TextDecoder("windows-1252").decode(bytes);
  }
}

/** Cells of the first sheet of an Office Open XML workbook (ECMA-376), as stored, without styles. */
async function readSheet(bytes: Uint8Array): Promise<string[][]> {
  const { default: JSZip } = await import("jszip");
  const zip = await JSZip.loadAsync(bytes).catch((cause: unknown) => {
    throw new Error("The workbook can't be opened: save it again as XLSX or CSV.", { cause });
  });
  const read = async (name: string) => {
    const text = await zip.file(name)?.async("string");
    return text === undefined ? undefined : new DOMParser().parseFromString(text, "application/xml");
  };
  const names = Object.keys(zip.files).filter((name) => /^xl\/worksheets\/[^/]+\.xml$/.test(name));
  const sheet = await read(names.includes("xl/worksheets/sheet1.xml") ? "xl/worksheets/sheet1.xml" : (names[0] ?? ""));
  if (!sheet) throw new Error("The workbook has no sheet.");
  const shared = await read("xl/sharedStrings.xml");
  const texts = [...(shared?.getElementsByTagName("si") ?? [])].map(textOf);
  return [...sheet.getElementsByTagName("row")].map((row) => {
    const cells: string[] = [];
    for (const cell of row.getElementsByTagName("c")) {
      cells[columnOf(cell.getAttribute("r") ?? "", cells.length)] = cellText(cell, texts);
    }
    return Array.from(cells, (cell) => cell ?? "");
  });
}

const textOf = (element: Element) =>
  [...element.getElementsByTagName("t")].map((part) => part.textContent ?? "").join("");

function cellText(cell: Element, texts: readonly string[]): string {
  const value = cell.getElementsByTagName("v")[0]?.textContent ?? "";
  const type = cell.getAttribute("t");
  if (type === "s") return texts[Number(value)] ?? "";
  return type === "inlineStr" ? textOf(cell) : value;
}

/** Place of a cell by its reference, `AB12` → 27. */
function columnOf(reference: string, next: number): number {
  const letters = /^[A-Z]+/.exec(reference)?.[0];
  if (letters === undefined) return next;
  return [...letters].reduce((place, letter) => place * 26 + letter.charCodeAt(0) - 64, 0) - 1;
}
