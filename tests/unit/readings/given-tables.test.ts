import { describe, expect, it } from "vitest";
import { readDelimited, sniffDelimiter } from "@/lib/domain/readings/delimited-text";
import { decodeText, sniffEncoding } from "@/lib/domain/readings/encoding";
import { columnNames, type GivenRow, hasDecimalComma, hasHeaderRow } from "@/lib/domain/readings/given-table";

const TEXT = "serial;Temperatur °C\nA-1;10,5\n";
const utf16be = (text: string) => Buffer.from(text, "utf16le").swap16();
const rowsOf = (...rows: string[][]): GivenRow[] => rows.map((cells, index) => ({ line: index + 1, cells }));

function readAll(text: string, delimiter: "," | ";" | "\t" = ",", pieceLength?: number): GivenRow[] {
  const reading = readDelimited(text, delimiter, pieceLength);
  for (;;) {
    const { done, value } = reading.next();
    if (done) return value;
  }
}

const codeOf = (work: () => unknown) => {
  try {
    work();
  } catch (error) {
    return (error as { code?: string }).code ?? String(error);
  }
  return "none";
};

describe("the encoding of a file", () => {
  it.each([
    ["utf-8", Buffer.from(TEXT)],
    ["utf-8", Buffer.from(`\uFEFF${TEXT}`)],
    ["utf-16le", Buffer.from(`\uFEFF${TEXT}`, "utf16le")],
    ["utf-16le", Buffer.from(TEXT, "utf16le")],
    ["utf-16be", utf16be(`\uFEFF${TEXT}`)],
    ["utf-16be", utf16be(TEXT)],
    ["windows-1252", Buffer.from(TEXT, "latin1")],
  ] as const)("is found to be %s, and read without its mark", (encoding, bytes) => {
    expect(sniffEncoding(bytes)).toBe(encoding);
    expect(decodeText(bytes, encoding).text).toBe(TEXT);
  });

  it("that is not the file's is told with the first line at fault", () => {
    const bytes = Buffer.concat([Buffer.from("a\nb\n"), Buffer.from([0xe9, 0x0a])]);
    expect(decodeText(bytes, "utf-8")).toEqual({ badLine: 3 });
    expect(decodeText(Buffer.from([0x61, 0x00, 0x62]), "utf-16le").text).toBeUndefined();
  });
});

describe("a text with delimiters", () => {
  it.each([
    ["a,b,c", ","],
    ["a;b,5;c", ";"],
    ["a\tb\tc", "\t"],
    ['"a;b;c;d",e', ","],
    ["single", ","],
    ["", ","],
  ])("shows its delimiter in the first line (%j)", (text, delimiter) => {
    expect(sniffDelimiter(text)).toBe(delimiter);
  });

  it("is the same read in pieces of any length, with the line on which each row begins", () => {
    const text = 'a,b\n\n"x\ny","z ""q"""\r\n , \nc,d';
    const whole = [
      { line: 1, cells: ["a", "b"] },
      { line: 3, cells: ["x\ny", 'z "q"'] },
      { line: 6, cells: ["c", "d"] },
    ];
    for (let length = 1; length < text.length + 2; length++) expect(readAll(text, ",", length)).toEqual(whole);
  });

  it.each([
    ["a quotation mark never closed", `a,b\n"${"c,d\n".repeat(50_000)}`, "table.row_too_long"],
    ["one never closed in a short file", 'a,b\n"c,d\n', "table.quotes_wrong"],
    ["one in the middle of a cell", 'a,b\nc"d,e\n', "table.quotes_wrong"],
    ["a million columns", "a,".repeat(1_000_000), "table.row_too_long"],
    ["300 columns", "a,".repeat(300), "table.too_many_columns"],
    ["one cell of a megabyte", `a,b\n${"x".repeat(1_000_000)},c`, "table.row_too_long"],
  ])("is refused with %s", (_, text, code) => {
    expect(codeOf(() => readAll(text))).toBe(code);
  });
});

describe("a given table", () => {
  it("has a header where no cell of the first row is a number", () => {
    expect(hasHeaderRow(rowsOf(["serial", "load"], ["A-1", "1"]))).toBe(true);
    expect(hasHeaderRow(rowsOf(["A-1", "10,5"]))).toBe(false);
    expect(hasHeaderRow(rowsOf(["", " "]))).toBe(false);
    expect(hasHeaderRow([])).toBe(false);
  });

  it("names every column once", () => {
    const rows = rowsOf(["load", "", "load"], ["1", "2", "3", "4"]);
    expect(columnNames(rows, true)).toEqual(["load", "#2", "load (#3)", "#4"]);
    expect(columnNames(rows, false)).toEqual(["#1", "#2", "#3", "#4"]);
  });

  it("shows a decimal comma", () => {
    expect(hasDecimalComma(rowsOf(["a"], ["-0,5e-3"]))).toBe(true);
    expect(hasDecimalComma(rowsOf(["a"], ["1,000.5"], ["A,1"]))).toBe(false);
  });
});
