import { execFileSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { expect, it } from "vitest";
import { type Sheet, writeXlsx } from "@/builders/spreadsheet/write-xlsx";

/** Python's own zip and XML readers: cells of every sheet as [reference, type, text]. */
const READER = `
import json, sys, zipfile, xml.etree.ElementTree as E
m = {"m": "http://schemas.openxmlformats.org/spreadsheetml/2006/main"}
z = zipfile.ZipFile(sys.argv[1])
assert z.testzip() is None
for name in z.namelist():
    E.fromstring(z.read(name))
book = E.fromstring(z.read("xl/workbook.xml"))
out = {}
for i, sheet in enumerate(book.findall(".//m:sheet", m), 1):
    root = E.fromstring(z.read(f"xl/worksheets/sheet{i}.xml"))
    out[sheet.get("name")] = [[c.get("r"), c.get("t"), (c.find("m:v", m) if c.get("t") is None else c.find(".//m:t", m)).text] for c in root.iter("{%s}c" % m["m"])]
print(json.dumps({"names": z.namelist(), "sheets": out}))
`;

function readByPython(bytes: Buffer): { names: string[]; sheets: Record<string, [string, string | null, string][]> } {
  const folder = mkdtempSync(join(tmpdir(), "trimwright-xlsx-"));
  const file = join(folder, "table.xlsx");
  writeFileSync(file, bytes);
  const text = execFileSync("python3", ["-c", READER, file], { encoding: "utf8" });
  rmSync(folder, { recursive: true });
  return JSON.parse(text);
}

const sheet: Sheet = {
  name: "A & B",
  headings: ["serial", "value (1/K)"],
  rows: [
    ["0012", -0.00041789123456789],
    ["=1+1", 5e-324],
    ['<"&>\u0001', null],
    ["1E5", Number.NaN],
  ],
};

it("is read by another program as it was meant: texts as texts, numbers in full, gaps as gaps", async () => {
  const { sheets, names } = readByPython(await writeXlsx([sheet, { name: "Second", headings: ["x"], rows: [] }]));
  expect(names[0]).toBe("[Content_Types].xml");
  expect(Object.keys(sheets)).toEqual(["A & B", "Second"]);
  const cells = sheets["A & B"] ?? [];
  expect(cells.filter(([at]) => at.startsWith("A")).map(([, type, text]) => [type, text])).toEqual([
    ["inlineStr", "serial"],
    ["inlineStr", "0012"],
    ["inlineStr", "=1+1"],
    ["inlineStr", '<"&>'],
    ["inlineStr", "1E5"],
  ]);
  expect(cells.filter(([at]) => at.startsWith("B")).map(([at, , text]) => [at, text])).toEqual([
    ["B1", "value (1/K)"],
    ["B2", "-0.00041789123456789"],
    ["B3", "5e-324"],
  ]);
});

it("gives the same bytes for the same cells, and names columns beyond Z", async () => {
  const wide: Sheet = {
    name: "Wide",
    headings: Array.from({ length: 60 }, (_, i) => `c${i}`),
    rows: [Array(60).fill(1)],
  };
  const first = await writeXlsx([wide]);
  expect(first.equals(await writeXlsx([wide]))).toBe(true);
  const ats = (readByPython(first).sheets.Wide ?? []).map(([at]) => at);
  expect([ats[25], ats[26], ats[51], ats[52]]).toEqual(["Z1", "AA1", "AZ1", "BA1"]);
});
