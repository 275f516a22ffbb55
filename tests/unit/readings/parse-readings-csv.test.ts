import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ROWS_MAX } from "@/lib/domain/readings/gather-readings";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";

const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at";
const ROW = "A-1,1,10.5,98,1941.32,0,-0.0139659,2026-03-02T09:48:00Z";
const parse = (text: string | Buffer) => parseReadingsCsv(Buffer.from(text as string));
const codes = async (text: string | Buffer) =>
  (await parse(text)).errors.map(({ row, column, code }) => `${row} ${column} ${code}`);
const withCell = (index: number, cell: string) => {
  const cells = ROW.split(",");
  cells[index] = cell;
  return `${HEADER}\n${ROW}\n${cells.join(",")}\n`;
};

describe("readings CSV", () => {
  it("reads the golden sample run whole", async () => {
    const parsed = await parseReadingsCsv(readFileSync("tests/fixtures/golden/readings-sample.csv"));
    expect(parsed.errorCount).toBe(0);
    expect(parsed.readings).toHaveLength(80);
    expect(parsed.readings[0]).toEqual({
      row: 2,
      serial: "MW20-2609-00001",
      point: 1,
      chamberC: 10.057,
      soakMin: 98,
      deviceTemp: 1941.32,
      loadKg: 0,
      signalMvV: -0.0139659,
      takenAt: "2026-03-02T09:48:00.000Z",
    });
  });

  it("takes a byte order mark, CRLF, other orders, quotes, blanks around cells, lower case and optional columns", async () => {
    const text = `\uFEFFtaken_at,signal_mv_v,load_kg,device_temp,soak_min,chamber_c,point,serial,position,dwell_s\r\n"2026-03-02T10:48:00.5+01:00", 1e-3 ,0,1,2,.5,+1, a-1 ,B3,\r\n\r\n`;
    const parsed = await parse(text);
    expect(parsed.errors).toEqual([]);
    expect(parsed.readings[0]).toMatchObject({
      serial: "A-1",
      signalMvV: 0.001,
      chamberC: 0.5,
      point: 1,
      takenAt: "2026-03-02T09:48:00.500Z",
      position: "B3",
      dwellS: null,
    });
  });

  it.each([
    [0, "=A1", "serial reading.serial_invalid"],
    [0, "Ä1", "serial reading.serial_invalid"],
    [0, "A".repeat(33), "serial reading.serial_invalid"],
    [1, "1.5", "point reading.point_invalid"],
    [1, "99999999999", "point reading.point_invalid"],
    [2, "NaN", "chamber_c reading.not_a_number"],
    [2, "Infinity", "chamber_c reading.not_a_number"],
    [3, "", "soak_min reading.not_a_number"],
    [4, "0x10", "device_temp reading.not_a_number"],
    [5, "=1+1", "load_kg reading.not_a_number"],
    [5, "1 000", "load_kg reading.not_a_number"],
    [6, "1e999", "signal_mv_v reading.not_a_number"],
    [6, "\u0661", "signal_mv_v reading.not_a_number"],
    [7, "2026-03-02 09:48:00", "taken_at reading.time_invalid"],
    [7, "2026-02-30T09:48:00Z", "taken_at reading.time_invalid"],
    [7, "2026-03-02T24:00:00Z", "taken_at reading.time_invalid"],
    [7, "0000-03-02T09:48:00Z", "taken_at reading.time_invalid"],
    [7, "2026-03-02T09:48:00", "taken_at reading.time_invalid"],
  ])("names row and column of a bad cell (%i: %s)", async (index, cell, expected) => {
    expect(await codes(withCell(index, cell))).toEqual([`3 ${expected}`]);
  });

  it("counts lines of the file, blank ones too, and names every bad row", async () => {
    expect(await codes(`${HEADER}\n\n${ROW}\n${ROW},1\nx\n${ROW}\n`)).toEqual([
      "4  row.cells_wrong",
      "5  row.cells_wrong",
    ]);
  });

  it("names unknown, repeated and missing columns and reads no further", async () => {
    const text = `serial,point,colour,point\n${ROW}\n`;
    expect((await codes(text)).slice(0, 3)).toEqual([
      "1 colour column.unknown",
      "1 point column.repeated",
      "1 chamber_c column.missing",
    ]);
  });

  it.each([
    ["Latin-1", Buffer.concat([Buffer.from(`${HEADER}\n${ROW}\n`), Buffer.from([0xe9, 0x0a])]), "3  file.not_utf8"],
    ["UTF-16", Buffer.concat([Buffer.from([0xff, 0xfe]), Buffer.from(HEADER, "utf16le")]), "1  file.not_utf8"],
    ["nothing", Buffer.alloc(0), "1  file.empty"],
    ["an open quotation mark", `${HEADER}\n"${ROW}\n${ROW}\n`, "3  file.quotes_wrong"],
    ["a quotation mark inside", `${HEADER}\nA"1,${ROW.slice(4)}\n`, "2  file.quotes_wrong"],
    ["100,000 columns", `${"a,".repeat(100_000)}\n`, "1  file.line_too_long"],
    ["semicolons", `${HEADER.replaceAll(",", ";")}\n`, "1  file.separator"],
  ])("refuses %s in words", async (_, text, expected) => {
    expect(await codes(text as string)).toEqual([expected]);
  });

  it("shows 200 errors and counts them all", async () => {
    const parsed = await parse(`${HEADER}\n${"A-1,1,x,98,1,0,0,2026-03-02T09:48:00Z\n".repeat(1000)}`);
    expect(parsed.errors).toHaveLength(200);
    expect(parsed.errorCount).toBe(1000);
  });

  it("refuses one row more than the bound, with the bound", async () => {
    const row = "A,1,1,1,1,0,0,2026-03-02T09:48:00Z\n";
    const text = Buffer.from(`${HEADER}\n${row.repeat(ROWS_MAX + 1)}`);
    await expect(parseReadingsCsv(text)).rejects.toMatchObject({
      code: "run.too_many_rows",
      message: expect.stringContaining("600,000"),
    });
  }, 60_000);

  it("gives back any finite readings digit for digit", async () => {
    const number = fc.double({ noNaN: true, noDefaultInfinity: true });
    await fc.assert(
      fc.asyncProperty(fc.array(fc.tuple(number, number, number), { minLength: 1, maxLength: 20 }), async (rows) => {
        const lines = rows.map(([a, b, c]) => `A-1,1,${a},0,${b},0,${c},2026-03-02T09:48:00Z`);
        const { readings, errorCount } = await parse(`${HEADER}\n${lines.join("\n")}`);
        expect(errorCount).toBe(0);
        expect(readings.map((r) => [r.chamberC, r.deviceTemp, r.signalMvV])).toEqual(
          rows.map((row) => row.map((value) => value + 0)),
        );
      }),
    );
  });

  it("answers any bytes without throwing, with readings or errors", async () => {
    await fc.assert(
      fc.asyncProperty(fc.uint8Array({ maxLength: 300 }), async (noise) => {
        const bytes = Buffer.concat([Buffer.from(`${HEADER}\n${ROW}\n`), noise]);
        const parsed = await parseReadingsCsv(bytes);
        expect(parsed.readings.length + parsed.errorCount).toBeGreaterThan(0);
      }),
    );
  });
});
