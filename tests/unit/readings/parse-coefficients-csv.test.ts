import { parse } from "csv-parse/sync";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { parseCoefficientsCsv } from "@/lib/domain/readings/parse-coefficients-csv";
import { finish } from "@/lib/domain/steps";

const HEADER = "serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc";
const VALUES = "-231.9,0.1246,-0.0139,6.9e-06,0.996,-0.00041";
const read = (text: string, pieceBytes?: number) => finish(parseCoefficientsCsv(Buffer.from(text), pieceBytes));
const whole = (text: string) => read(text, text.length + 10);

/** What csv-parse makes of the file at once, each record with the line that it counts. */
function readAtOnce(text: string) {
  const records: { record: string[]; line: number }[] = [];
  parse(text, {
    bom: true,
    relax_column_count: true,
    skip_empty_lines: true,
    record_delimiter: ["\r\n", "\n", "\r"],
    on_record: (record: string[], { lines }) => {
      records.push({ record: record.map((cell) => cell.trim()), line: lines });
      return null;
    },
  });
  return records;
}

describe("a CSV of coefficients", () => {
  it("is the same read in pieces as read at once, with blank lines, marks and line breaks in cells", () => {
    const plain = fc.constantFrom("", "A-1", " 1.5 ", "ä€😀", "-2e-5");
    const marked = fc.constantFrom('""', '"a""b"', '"x\ny"', '"x\r\ny"', '" , "', '"\n\n"');
    const row = fc.array(fc.oneof(plain, marked), { minLength: 1, maxLength: 4 }).map((cells) => cells.join(","));
    const rows = fc.array(row, { maxLength: 40 });
    fc.assert(
      fc.property(rows, fc.nat(120), fc.constantFrom("\n", "\r\n", "\r"), fc.boolean(), (lines, size, end, bom) => {
        const text = `${bom ? "\uFEFF" : ""}${lines.join(end)}`;
        expect(read(text, size).records).toEqual(readAtOnce(text));
        expect(read(text, size)).toEqual(whole(text));
      }),
    );
  });

  it("names the line of what can't be read on, however it is cut into pieces", () => {
    const rows = Array.from({ length: 30 }, (_, i) => `S-${i},${VALUES}`);
    for (const broken of ['S-X,1"2', `"S-X,${VALUES}`, `S-X,"1"2`]) {
      const text = [HEADER, ...rows, "", broken, ...rows].join("\n");
      const { errors, sets } = whole(text);
      expect(errors.map(({ code }) => code)).toContain("file.quotes_wrong");
      expect(sets).toHaveLength(30);
      for (const size of [1, 50, 700]) expect(read(text, size)).toEqual(whole(text));
    }
  });

  it("counts the rows before a wrong one in every piece", () => {
    const rows = Array.from({ length: 5_000 }, (_, i) => `S-${i},${VALUES}`);
    const { errors, errorCount } = read([HEADER, ...rows, `S-0,${VALUES}`, `S-X,1`, `S-Y,x${VALUES}`].join("\r\n"));
    expect(errorCount).toBe(3);
    expect(errors.map(({ row, code }) => `${row} ${code}`)).toEqual([
      "5002 coefficients.serial_repeated",
      "5003 row.cells_wrong",
      "5004 reading.not_a_number",
    ]);
  });
});
