/** Workbooks for tests (ECMA-376), from the XML of their parts. */
import JSZip from "jszip";

export interface MadeWorkbook {
  /** Rows of the first sheet as XML, `<row r="1">…</row>`. */
  sheet?: string;
  /** Texts that cells share, in their order. */
  texts?: string[];
  days1904?: boolean;
  /** Parts that replace or add to those made here. */
  parts?: Record<string, string | Uint8Array>;
}

const escapeXml = (text: string) => text.replaceAll("&", "&amp;").replaceAll("<", "&lt;");

/** A row of texts. */
export function textRow(number: number, cells: readonly string[]): string {
  const inner = cells.map((cell) => `<c t="inlineStr"><is><t>${escapeXml(cell)}</t></is></c>`).join("");
  return `<row r="${number}">${inner}</row>`;
}

export async function makeWorkbook({
  sheet = "",
  texts = [],
  days1904,
  parts = {},
}: MadeWorkbook): Promise<Uint8Array> {
  const zip = new JSZip();
  const all: Record<string, string | Uint8Array> = {
    "xl/workbook.xml": `<workbook xmlns:r="r"><workbookPr${days1904 ? ' date1904="1"' : ""}/><sheets><sheet name="March" sheetId="1" r:id="rId1"/></sheets></workbook>`,
    "xl/_rels/workbook.xml.rels": `<Relationships><Relationship Id="rId1" Target="worksheets/sheet1.xml"/></Relationships>`,
    "xl/worksheets/sheet1.xml": `<?xml version="1.0"?><worksheet><sheetData>${sheet}</sheetData></worksheet>`,
    "xl/sharedStrings.xml": `<sst>${texts.map((text) => `<si><t>${escapeXml(text)}</t></si>`).join("")}</sst>`,
    ...parts,
  };
  for (const [name, content] of Object.entries(all)) zip.file(name, content);
  return zip.generateAsync({ type: "uint8array", compression: "DEFLATE" });
}
