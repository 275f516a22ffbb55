import { describe, expect, it } from "vitest";
import { isCompoundFile, isZip, openWorkbook, readSheet } from "@/lib/domain/readings/workbook";
import { readXmlPart } from "@/lib/domain/readings/xml-part";
import { type MadeWorkbook, makeWorkbook, textRow } from "../../support/made-workbook";

async function read(made: MadeWorkbook) {
  const workbook = await openWorkbook(await makeWorkbook(made));
  return readSheet(workbook, workbook.sheets[0] as (typeof workbook.sheets)[0]);
}

const codeOf = (work: Promise<unknown>) =>
  work.then(
    () => "none",
    (error) => error.code ?? String(error),
  );

describe("a workbook", () => {
  it("gives texts, numbers, formulas, faults and truth values as they are, rows and gaps in their place", async () => {
    const sheet = `
      <row r="2"><c r="A2" t="s"><v>1</v></c><c r="C2"><v>0.10000000000000001</v></c></row>
      <row r="3"/>
      <row r="5"><c r="B5"><f>A2&amp;"x"</f><v>12</v></c><c t="b"><v>1</v></c><c t="e"><v>#REF!</v></c><c t="str"><v>t</v></c></row>`;
    expect(await read({ sheet, texts: ["unused", "A-1 <b>"] })).toEqual([
      { line: 2, cells: ["A-1 <b>", "", "0.10000000000000001"], kinds: ["text", "text", "number"] },
      { line: 5, cells: ["", "12", "1", "#REF!", "t"], kinds: ["text", "formula", "yes-no", "fault", "text"] },
    ]);
  });

  it("joins the runs of a shared text and leaves reading guides out; takes prefixed names and CDATA", async () => {
    const parts = {
      "xl/sharedStrings.xml":
        "<sst><si><r><t>A</t></r><r><t>-1</t></r><rPh><t>no</t></rPh></si><si><t><![CDATA[B<2]]></t></si></sst>",
      "xl/worksheets/sheet1.xml":
        '<x:worksheet xmlns:x="x"><x:sheetData><x:row><x:c t="s"><x:v>0</x:v></x:c><x:c t="s"><x:v>1</x:v></x:c></x:row></x:sheetData></x:worksheet>',
    };
    expect((await read({ parts }))[0]?.cells).toEqual(["A-1", "B<2"]);
  });

  it("tells its sheets and from when its days count", async () => {
    const workbook = await openWorkbook(await makeWorkbook({ days1904: true, sheet: textRow(1, ["a"]) }));
    expect(workbook).toMatchObject({ days1904: true, sheets: [{ name: "March" }] });
  });

  it("is told from other files by its first bytes", async () => {
    expect(isZip(await makeWorkbook({}))).toBe(true);
    expect(isZip(Buffer.from("serial,point"))).toBe(false);
    expect(isCompoundFile(Buffer.from("d0cf11e0a1b11ae1", "hex"))).toBe(true);
  });
});

describe("a hostile workbook is refused", () => {
  it("cut short, or no workbook at all", async () => {
    const whole = await makeWorkbook({ sheet: textRow(1, ["a"]) });
    expect(await codeOf(openWorkbook(whole.subarray(0, whole.length / 2)))).toBe("workbook.not_opened");
    expect(await codeOf(openWorkbook(Buffer.from("PK no zip")))).toBe("workbook.not_opened");
    const other = await makeWorkbook({ parts: { "xl/workbook.xml": "<workbook/>" } });
    expect(await codeOf(openWorkbook(other))).toBe("workbook.no_sheet");
  });

  it.each([
    ["XML that ends early", "<worksheet><sheetData><row><c><v>1</v></c>"],
    ["XML that is none", "<worksheet></sheet>"],
    ["nested a thousand deep", `${"<a>".repeat(1000)}${"</a>".repeat(1000)}`],
    ["entities that grow", '<!DOCTYPE w [<!ENTITY a "aaaaaaaa"><!ENTITY b "&a;&a;&a;&a;">]><worksheet>&b;</worksheet>'],
    ["an entity from outside", '<!DOCTYPE w [<!ENTITY x SYSTEM "file:///etc/passwd">]><worksheet>&x;</worksheet>'],
    ["bytes that are no UTF-8", new Uint8Array([0x3c, 0x61, 0x3e, 0xff, 0xfe, 0x3c, 0x2f, 0x61, 0x3e])],
  ])("with a sheet of %s", async (_, content) => {
    expect(await codeOf(read({ parts: { "xl/worksheets/sheet1.xml": content } }))).toBe("workbook.not_well_formed");
  });

  it("that unpacks to far more than it weighs, before all of it is unpacked", async () => {
    const bomb = `<sst>${" ".repeat(3_000_000)}</sst>`;
    const bytes = await makeWorkbook({ parts: { "xl/sharedStrings.xml": bomb } });
    expect(bytes.length).toBeLessThan(10_000);
    const { zip } = await openWorkbook(bytes);
    const shares: number[] = [];
    const reading = readXmlPart(zip, "xl/sharedStrings.xml", 1_000_000, {}, (share) => shares.push(share));
    expect(await codeOf(reading)).toBe("workbook.too_large");
    expect(shares.at(-1)).toBeLessThan(0.4);
  });

  it("with thousands of files, or with a cell in the last column there is", async () => {
    const many = Object.fromEntries(Array.from({ length: 2_500 }, (_, index) => [`x/${index}`, ""]));
    expect(await codeOf(makeWorkbook({ parts: many }).then(openWorkbook))).toBe("workbook.too_large");
    expect(await codeOf(read({ sheet: '<row r="1"><c r="XFD1"><v>1</v></c></row>' }))).toBe("table.too_many_columns");
  });
});
