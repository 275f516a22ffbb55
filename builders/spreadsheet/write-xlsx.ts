import JSZip from "jszip";

/** A cell: a number keeps its full precision, a text stays a text whatever it looks like, null leaves the cell empty. */
export type SheetCell = string | number | null;

export interface Sheet {
  /** At most 31 characters, none of []:*?/\ */
  name: string;
  /** One row of headings, kept in sight. */
  headings: readonly string[];
  rows: readonly (readonly SheetCell[])[];
}

/** Dates of zip entries, so that the same cells give the same bytes. */
const ENTRY_DATE = new Date(Date.UTC(1980, 0, 1));
const MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
const RELATIONS = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const PACKAGE = "http://schemas.openxmlformats.org/package/2006";
const SHEET_TYPE = "application/vnd.openxmlformats-officedocument.spreadsheetml";
const DECLARATION = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n';

/** Widths from the longest of so many rows. */
const MEASURED_ROWS = 200;

/**
 * A workbook of plain sheets (ISO/IEC 29500-1, SpreadsheetML, transitional): numbers as binary64 in decimal, texts inline,
 * no formulas, no macros, nothing from outside. The same sheets give the same bytes.
 */
export async function writeXlsx(sheets: readonly Sheet[]): Promise<Buffer> {
  const zip = new JSZip();
  const add = (name: string, xml: string) =>
    zip.file(name, DECLARATION + xml, { date: ENTRY_DATE, createFolders: false });
  add("[Content_Types].xml", contentTypes(sheets.length));
  add("_rels/.rels", relationships([{ type: "officeDocument", target: "xl/workbook.xml" }]));
  add("xl/workbook.xml", workbook(sheets));
  add(
    "xl/_rels/workbook.xml.rels",
    relationships([
      ...sheets.map((_, index) => ({ type: "worksheet", target: `worksheets/sheet${index + 1}.xml` })),
      { type: "styles", target: "styles.xml" },
    ]),
  );
  add("xl/styles.xml", STYLES);
  for (const [index, sheet] of sheets.entries()) add(`xl/worksheets/sheet${index + 1}.xml`, worksheet(sheet));
  return zip.generateAsync({ type: "nodebuffer", compression: "DEFLATE", platform: "DOS" });
}

function contentTypes(count: number): string {
  const part = (name: string, type: string) => `<Override PartName="${name}" ContentType="${SHEET_TYPE}.${type}+xml"/>`;
  const sheets = Array.from({ length: count }, (_, index) => part(`/xl/worksheets/sheet${index + 1}.xml`, "worksheet"));
  return (
    `<Types xmlns="${PACKAGE}/content-types"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>` +
    `<Default Extension="xml" ContentType="application/xml"/>${part("/xl/workbook.xml", "sheet.main")}${part("/xl/styles.xml", "styles")}${sheets.join("")}</Types>`
  );
}

function relationships(list: readonly { type: string; target: string }[]): string {
  const items = list.map(
    ({ type, target }, index) => `<Relationship Id="rId${index + 1}" Type="${RELATIONS}/${type}" Target="${target}"/>`,
  );
  return `<Relationships xmlns="${PACKAGE}/relationships">${items.join("")}</Relationships>`;
}

function workbook(sheets: readonly Sheet[]): string {
  const items = sheets.map(
    ({ name }, index) => `<sheet name="${escapeXml(name)}" sheetId="${index + 1}" r:id="rId${index + 1}"/>`,
  );
  return `<workbook xmlns="${MAIN}" xmlns:r="${RELATIONS}"><sheets>${items.join("")}</sheets></workbook>`;
}

/** Two styles: plain, and bold for the headings. */
const STYLES =
  `<styleSheet xmlns="${MAIN}"><fonts count="2"><font><sz val="11"/><name val="Calibri"/></font>` +
  `<font><b/><sz val="11"/><name val="Calibri"/></font></fonts>` +
  `<fills count="2"><fill><patternFill patternType="none"/></fill><fill><patternFill patternType="gray125"/></fill></fills>` +
  `<borders count="1"><border><left/><right/><top/><bottom/><diagonal/></border></borders>` +
  `<cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs>` +
  `<cellXfs count="2"><xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0"/>` +
  `<xf numFmtId="0" fontId="1" fillId="0" borderId="0" xfId="0" applyFont="1"/></cellXfs></styleSheet>`;

function worksheet({ headings, rows }: Sheet): string {
  const widths = headings.map((heading, column) => {
    const texts = rows.slice(0, MEASURED_ROWS).map((row) => String(row[column] ?? "").length);
    return `<col min="${column + 1}" max="${column + 1}" width="${Math.min(48, Math.max(heading.length, ...texts) + 2)}" customWidth="1"/>`;
  });
  const names = headings.map((_, column) => columnName(column));
  const lines = rows.map(
    (row, index) =>
      `<row r="${index + 2}">${row.map((cell, column) => cellXml(cell, `${names[column]}${index + 2}`)).join("")}</row>`,
  );
  const head = headings.map((heading, column) => cellXml(heading, `${names[column]}1`, 1)).join("");
  return (
    `<worksheet xmlns="${MAIN}"><sheetViews><sheetView workbookViewId="0"><pane xSplit="1" ySplit="1" topLeftCell="B2" activePane="bottomRight" state="frozen"/></sheetView></sheetViews>` +
    `<cols>${widths.join("")}</cols><sheetData><row r="1">${head}</row>${lines.join("")}</sheetData></worksheet>`
  );
}

function cellXml(cell: SheetCell, at: string, style = 0): string {
  if (cell === null || cell === "") return "";
  const look = style ? ` s="${style}"` : "";
  if (typeof cell === "number") return Number.isFinite(cell) ? `<c r="${at}"${look}><v>${cell}</v></c>` : "";
  return `<c r="${at}"${look} t="inlineStr"><is><t xml:space="preserve">${escapeXml(cell)}</t></is></c>`;
}

/** A, B … Z, AA … of a column counted from 0. */
function columnName(column: number): string {
  const rest = Math.floor(column / 26) - 1;
  return (rest < 0 ? "" : columnName(rest)) + String.fromCharCode(65 + (column % 26));
}

const ENTITIES: Record<string, string> = { "&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;" };

/** Signs that XML 1.0 can't carry are left out: controls but tab and line ends, and the two that are no characters. */
function escapeXml(text: string): string {
  const isCarried = (sign: string) => {
    const code = sign.codePointAt(0) ?? 0;
    return code >= 0x20 ? code !== 0xfffe && code !== 0xffff : code === 9 || code === 10 || code === 13;
  };
  return [...text]
    .filter(isCarried)
    .map((sign) => ENTITIES[sign] ?? sign)
    .join("");
}
