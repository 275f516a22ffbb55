import JSZip from "jszip";
import { AppError } from "@/lib/errors";
import { assertShape } from "./delimited-text";
import type { CellKind, GivenRow } from "./given-table";
import { readXmlPart } from "./xml-part";

/** Parts of a workbook that we read, unpacked; a sheet of 600,000 rows needs about 200 MB. */
const SHEET_MAX_BYTES = 320 * 1024 * 1024;
const PART_MAX_BYTES = 96 * 1024 * 1024;
/** Files in the zip; a workbook of a hundred sheets has some 300. */
const ENTRIES_MAX = 2_000;

export interface Sheet {
  name: string;
  /** Name of its part in the zip. */
  part: string;
}

/** An Office Open XML workbook (ECMA-376), opened for reading. */
export interface Workbook {
  sheets: Sheet[];
  /** Its dates count from 1904. */
  days1904: boolean;
  zip: JSZip;
  /** Shared texts, once they were read. */
  texts?: string[];
}

/** Whether bytes are those of a zip, as a workbook is. */
export function isZip(bytes: Uint8Array): boolean {
  return bytes[0] === 0x50 && bytes[1] === 0x4b;
}

/** Whether bytes are those of the older kind of file, which is also the shell of a workbook with a password. */
export function isCompoundFile(bytes: Uint8Array): boolean {
  return [0xd0, 0xcf, 0x11, 0xe0].every((byte, index) => bytes[index] === byte);
}

/** @throws AppError `workbook.not_opened`, `workbook.too_large`, `workbook.not_well_formed`, `workbook.no_sheet` */
export async function openWorkbook(bytes: Uint8Array): Promise<Workbook> {
  assertFewEntries(bytes);
  const zip = await JSZip.loadAsync(bytes).catch((cause: unknown) => {
    const message = "The workbook can't be opened: it is damaged or cut short. Save it again as XLSX, or as CSV.";
    throw new AppError("workbook.not_opened", { message }, { cause });
  });
  const targets = new Map<string, string>();
  await readXmlPart(zip, "xl/_rels/workbook.xml.rels", PART_MAX_BYTES, {
    open: (name, { Id, Target }) => {
      if (name === "Relationship" && Id && Target) targets.set(Id, Target.replace(/^\/?(xl\/)?/, "xl/"));
    },
  });
  const workbook: Workbook = { sheets: [], days1904: false, zip };
  await readXmlPart(zip, "xl/workbook.xml", PART_MAX_BYTES, {
    open: (name, attributes) => {
      if (name === "workbookPr") workbook.days1904 = /^(1|true)$/.test(attributes.date1904 ?? "");
      const part = name === "sheet" ? targets.get(attributes["r:id"] ?? "") : undefined;
      if (part && zip.file(part)) workbook.sheets.push({ name: attributes.name ?? part, part });
    },
  });
  if (workbook.sheets.length > 0) return workbook;
  throw new AppError("workbook.no_sheet", { message: "The workbook has no sheet with cells." });
}

/** JSZip makes an object of every entry at once, so their number is read first (APPNOTE.TXT, 4.3.16). */
function assertFewEntries(bytes: Uint8Array): void {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  for (let at = bytes.length - 22; at >= Math.max(0, bytes.length - 22 - 0xffff); at--) {
    if (view.getUint32(at, true) !== 0x06054b50) continue;
    const entries = view.getUint16(at + 10, true);
    if (entries <= ENTRIES_MAX) return;
    const message = `The workbook holds ${entries.toLocaleString("en")} files; one of readings has a few dozen.`;
    throw new AppError("workbook.too_large", { message });
  }
}

/**
 * The cells of a sheet as stored, without styles; rows without any content are left out.
 * @param onProgress gets what was read so far, from 0 to 1.
 * @throws AppError `workbook.too_large`, `workbook.not_well_formed`, `table.too_many_columns`, `run.too_many_rows`
 */
export async function readSheet(
  workbook: Workbook,
  { part }: Sheet,
  onProgress?: (share: number) => void,
): Promise<GivenRow[]> {
  workbook.texts ??= await readTexts(workbook.zip);
  const reader = new SheetReader(workbook.texts);
  await readXmlPart(workbook.zip, part, SHEET_MAX_BYTES, reader, onProgress);
  return reader.rows;
}

/** Shared texts in their order; those of a reading guide are left out. */
async function readTexts(zip: JSZip): Promise<string[]> {
  const texts: string[] = [];
  let phonetic = false;
  let inText = false;
  if (!zip.file("xl/sharedStrings.xml")) return texts;
  await readXmlPart(zip, "xl/sharedStrings.xml", PART_MAX_BYTES, {
    open: (name) => {
      if (name === "si") texts.push("");
      if (name === "rPh") phonetic = true;
      inText = name === "t" && !phonetic;
    },
    text: (text) => {
      if (inText) texts[texts.length - 1] += text;
    },
    close: (name) => {
      if (name === "rPh") phonetic = false;
      inText = false;
    },
  });
  return texts;
}

const KIND_OF_TYPE: Record<string, CellKind> = {
  s: "text",
  str: "text",
  inlineStr: "text",
  d: "text",
  b: "yes-no",
  e: "fault",
};

class SheetReader {
  readonly rows: GivenRow[] = [];
  private line = 0;
  private cells: string[] = [];
  private kinds: CellKind[] = [];
  private place = -1;
  private type = "n";
  private value = "";
  private isFormula = false;
  private inValue = false;

  constructor(private readonly texts: readonly string[]) {}

  open(name: string, attributes: Record<string, string>): void {
    if (name === "row") {
      this.line = Number(attributes.r) || this.line + 1;
      [this.cells, this.kinds, this.place] = [[], [], -1];
    } else if (name === "c") {
      this.place = placeOf(attributes.r ?? "") ?? this.place + 1;
      [this.type, this.value, this.isFormula] = [attributes.t ?? "n", "", false];
    } else if (name === "f") this.isFormula = true;
    this.inValue = name === "v" || name === "t";
  }

  text(text: string): void {
    if (this.inValue) this.value += text;
  }

  close(name: string): void {
    this.inValue = false;
    if (name === "c") this.takeCell();
    else if (name === "row") this.takeRow();
  }

  private takeCell(): void {
    // Before anything is filled up to that place: a sheet's last column would be one of 16,384.
    assertShape({ length: this.place + 1 } as string[], this.line, 0);
    while (this.cells.length < this.place) {
      this.cells.push("");
      this.kinds.push("text");
    }
    const text = this.type === "s" ? (this.texts[Number(this.value)] ?? "") : this.value;
    this.cells[this.place] = text;
    const kind = text === "" ? "text" : (KIND_OF_TYPE[this.type] ?? "number");
    this.kinds[this.place] = this.isFormula ? "formula" : kind;
  }

  private takeRow(): void {
    if (this.cells.every((cell) => cell.trim() === "")) return;
    assertShape(this.cells, this.line, this.rows.length);
    this.rows.push({ line: this.line, cells: this.cells, kinds: this.kinds });
  }
}

/** Place of a cell by its reference, `AB12` → 27; undefined where it has none. */
function placeOf(reference: string): number | undefined {
  const letters = /^[A-Z]{1,3}(?=\d)/.exec(reference)?.[0];
  if (letters === undefined) return undefined;
  return [...letters].reduce((place, letter) => place * 26 + letter.charCodeAt(0) - 64, 0) - 1;
}
