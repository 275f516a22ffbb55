import { describe, expect, it } from "vitest";
import { isReadingsCsv, TableCheck } from "@/lib/domain/readings/check-table";
import type { CellKind } from "@/lib/domain/readings/given-table";
import { findMapping, type MapOptions, missingColumns, suggestMap } from "@/lib/domain/readings/map-table";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";
import { firstGolden } from "../../support/scenario/golden";

const golden = firstGolden();
const NAMES = ["Serial", "Point", "Chamber (°C)", "Soak [min]", "device temp", "Load-kg", "Signal mV/V", "Taken at"];
const ROW = ["a-1", "1", "10,5", "98", "1941,32", "0", "-0,0139659", "2026-03-02 10:48"];
// The names of the table with their units, as its maker wrote them.
const map = { serial: 0, point: 1, chamber_c: 2, soak_min: 3, device_temp: 4, load_kg: 5, signal_mv_v: 6, taken_at: 7 };
const options: MapOptions = { decimalComma: true, offset: "+01:00" };

function check(rows: string[][], given: Partial<MapOptions> = {}, kinds?: CellKind[]) {
  const table = new TableCheck(map, { ...options, ...given });
  rows.forEach((cells, index) => {
    table.take({ line: index + 2, cells, ...(kinds && { kinds }) });
  });
  return { ...table.done(golden.family, "zero"), csv: table.csv.join(""), lines: table.lines };
}
const withCell = (index: number, cell: string) => ROW.map((given, at) => (at === index ? cell : given));
const codes = (result: { errors: { row: number; column: string; code: string }[] }) =>
  result.errors.map(({ row, column, code }) => `${row} ${column} ${code}`);

describe("mapping a table", () => {
  it("suggests the columns whose names are ours but for case, blanks and signs", () => {
    expect(suggestMap(NAMES)).toMatchObject({
      serial: 0,
      point: 1,
      device_temp: 4,
      load_kg: 5,
      signal_mv_v: 6,
      taken_at: 7,
    });
    expect(missingColumns(suggestMap(["serial"]))).toHaveLength(7);
  });

  it("finds what was remembered by name, or not at all", () => {
    expect(findMapping({ serial: "Serial", load_kg: "Load-kg" }, NAMES)).toEqual({ serial: 0, load_kg: 5 });
    expect(findMapping({ serial: "Other" }, NAMES)).toBeUndefined();
  });

  it("knows a file that can be sent as it stands", () => {
    const given = { names: Object.keys(map), headerRow: true, encoding: "utf-8", delimiter: "," };
    const plain = { decimalComma: false, offset: "" };
    expect(isReadingsCsv(given, map, plain)).toBe(true);
    expect(isReadingsCsv({ ...given, delimiter: ";" }, map, plain)).toBe(false);
    expect(isReadingsCsv({ ...given, encoding: "windows-1252" }, map, plain)).toBe(false);
    expect(isReadingsCsv({ ...given, names: [...given.names, "remark"] }, map, plain)).toBe(false);
    expect(isReadingsCsv(given, { ...map, point: 2, chamber_c: 1 }, plain)).toBe(false);
    expect(isReadingsCsv(given, map, { ...plain, offset: "Z" })).toBe(false);
  });
});

describe("checking a table before it is sent", () => {
  it("writes the CSV that the server reads the same from", async () => {
    const { csv, errorCount, findings, devices, rows } = check([ROW, withCell(1, "2"), withCell(0, "B-2")]);
    expect([errorCount, devices, rows]).toEqual([0, 2, 3]);
    expect(findings.length).toBeGreaterThan(0);
    const read = await parseReadingsCsv(Buffer.from(csv));
    expect(read.errors).toEqual([]);
    expect(read.readings[0]).toMatchObject({
      serial: "A-1",
      chamberC: 10.5,
      deviceTemp: 1941.32,
      signalMvV: -0.0139659,
      takenAt: "2026-03-02T09:48:00.000Z",
    });
  });

  it("names what is wrong by line and column of the given file", () => {
    const result = check([ROW, withCell(2, "1,000,5"), withCell(0, "=A1"), withCell(6, "1e999"), withCell(2, "NaN")]);
    expect(codes(result)).toEqual([
      "3 chamber_c reading.not_a_number",
      "4 serial reading.serial_invalid",
      "5 signal_mv_v reading.not_a_number",
      "6 chamber_c reading.not_a_number",
    ]);
    expect(result.findings).toEqual([]);
  });

  it("tells the line of every row it sends, so that the server's answer can be shown in place", () => {
    const table = new TableCheck(map, options);
    for (const line of [2, 5, 9]) table.take({ line, cells: ROW });
    table.done(golden.family, "zero");
    expect(table.lines).toEqual([2, 5, 9]);
  });

  it("refuses numbers for texts, formulas and error values of a workbook in words", () => {
    const kinds = (at: number, kind: CellKind) => ROW.map((_, index): CellKind => (index === at ? kind : "text"));
    expect(codes(check([ROW], {}, kinds(0, "number")))).toEqual(["2 serial cell.number_for_text"]);
    expect(codes(check([ROW], {}, kinds(6, "formula")))).toEqual(["2 signal_mv_v cell.formula"]);
    expect(codes(check([ROW], {}, kinds(2, "fault")))).toEqual(["2 chamber_c cell.fault"]);
    expect(check([ROW], {}, kinds(2, "number")).errorCount).toBe(0);
  });

  it.each([
    ["46083.45", false, "2026-03-02T10:48:00+01:00"],
    ["44621.45", true, "2026-03-02T10:48:00+01:00"],
    ["2026-03-02T10:48:30.5", false, "2026-03-02T10:48:30.5+01:00"],
    ["2026-03-02T10:48:30Z", false, "2026-03-02T10:48:30Z"],
  ])("reads %s as a time (days from 1904: %s)", (cell, days1904, expected) => {
    const { csv } = check([withCell(7, cell)], { days1904 });
    expect(csv.trim().split(",").at(-1)).toBe(expected);
  });

  it("counts every error and names 200", () => {
    const { errorCount, errors } = check(Array.from({ length: 500 }, () => withCell(2, "x")));
    expect([errorCount, errors.length]).toEqual([500, 200]);
  });

  it("agrees with the server on the golden runs", async () => {
    for (const purpose of ["sample", "zero", "span", "verification"] as const) {
      const lines = golden.read(`readings-${purpose}.csv`).toString().trim().split("\n");
      const names = (lines[0] as string).split(",");
      const table = new TableCheck(suggestMap(names), { decimalComma: false, offset: "" });
      lines.slice(1).forEach((line, index) => {
        table.take({ line: index + 2, cells: line.split(",") });
      });
      const { errorCount, rows } = table.done(golden.family, purpose);
      expect([purpose, errorCount, rows]).toEqual([purpose, 0, lines.length - 1]);
    }
  });
});
