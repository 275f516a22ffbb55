import { parse } from "csv-parse/sync";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { readCsvRecords } from "@/lib/domain/readings/csv-records";

async function read(text: string, pieceBytes?: number) {
  const records: { record: string[]; line: number }[] = [];
  const take = (record: string[], line: number) => records.push({ record, line }) > 0;
  const fault = await readCsvRecords(Buffer.from(text), take, pieceBytes);
  return { records, fault };
}

const quoted = (text: string) => `"${text.replaceAll('"', '""')}"`;

describe("records of a CSV", () => {
  it("are the same read in pieces as read at once, with line breaks and marks inside cells", async () => {
    const cell = fc.oneof(fc.string({ maxLength: 20 }), fc.constantFrom('a"b', "x\ny", "x\r\ny", '"', ",", "ä€😀"));
    const row = fc.array(cell.map(quoted), { minLength: 2, maxLength: 4 }).map((cells) => cells.join(","));
    await fc.assert(
      fc.asyncProperty(fc.array(row, { minLength: 1, maxLength: 40 }), fc.nat(200), async (rows, pieceBytes) => {
        const text = `${rows.join("\n")}\n`;
        const { records, fault } = await read(text, pieceBytes);
        expect(fault).toBeUndefined();
        expect(records.map(({ record }) => record)).toEqual(parse(text, { relax_column_count: true }));
        expect(records.at(-1)?.line).toBe(text.split(/\r\n|\n|\r/).length - 1);
      }),
    );
  });

  it.each([
    ["\n", 1],
    ["\r\n", 1],
    ["\r", 1],
  ])("carry their line after %j, blank lines counted", async (end) => {
    const { records } = await read(`a,b${end}${end}"c${end}d",e${end}f,g`);
    expect(records).toEqual([
      { record: ["a", "b"], line: 1 },
      { record: [`c${end}d`, "e"], line: 4 },
      { record: ["f", "g"], line: 5 },
    ]);
  });

  it("end at a fault, with its line in the file", async () => {
    const good = "a,b,c\n".repeat(50_000);
    expect((await read(`${good}x"y,z\n${good}`)).fault).toEqual({ line: 50_001, reason: "quotes_wrong" });
    expect((await read(`${good}"${good}`)).fault).toMatchObject({ reason: "record_too_long" });
    expect((await read("x".repeat(300_000))).fault).toEqual({ line: 1, reason: "record_too_long" });
    expect((await read("")).records).toEqual([]);
  });

  it("stop where no more are wanted", async () => {
    let taken = 0;
    await readCsvRecords(Buffer.from("a\n".repeat(200_000)), () => ++taken < 3);
    expect(taken).toBe(3);
  });
});
