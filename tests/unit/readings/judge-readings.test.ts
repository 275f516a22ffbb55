import { describe, expect, it } from "vitest";
import { judgeReadings } from "@/lib/domain/readings/judge-readings";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";
import { RowErrorList } from "@/lib/domain/readings/row-error-list";
import { firstGolden } from "../../support/scenario/golden";

const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at";
const rules = firstGolden().family;
const row = (serial: string, point: number | string, load: number | string) =>
  `${serial},${point},20,98,1900,${load},0.1,2026-03-02T09:48:00Z`;

async function judge(...rows: string[]) {
  const errors = new RowErrorList();
  const parsed = await parseReadingsCsv(Buffer.from([HEADER, ...rows].join("\n")));
  const { errorCount, findings } = judgeReadings(rules, "sample", parsed, errors);
  return { errorCount, findings, codes: errors.list().map((error) => `${error.row} ${error.code}`) };
}

describe("judging the readings of a file", () => {
  it("names a loaded reading without an unloaded one", async () => {
    const { codes, findings } = await judge(row("A", 1, 12), row("B", 1, 0));
    expect([codes, findings]).toEqual([["2 reading.loaded_without_unloaded"], []]);
  });

  it.each([
    ["of the same serial and point", row("A", 1, "x"), false],
    ["of the same serial, its point not readable", row("A", "x", 0), false],
    ["whose serial can't be read", row("=A", 1, 0), false],
    ["of which nothing can be read", "A,1", false],
    ["of another serial", row("B", 1, "x"), true],
    ["of another point", row("A", 2, "x"), true],
  ])("keeps silent on it beside a bad row %s, where that may be the missing one", async (_, bad, named) => {
    const { codes } = await judge(row("A", 1, 12), bad);
    expect(codes.includes("2 reading.loaded_without_unloaded")).toBe(named);
  });

  it("does not call a file empty whose rows are all wrong", async () => {
    expect((await judge(row("A", 1, "x"))).codes).toEqual(["2 reading.not_a_number"]);
    expect((await judge()).codes).toEqual(["1 run.empty"]);
  });

  it("counts every error and names the first", async () => {
    const rows = Array.from({ length: 300 }, (_, index) => row(`A-${index}`, 1, "x"));
    const { errorCount, codes } = await judge(...rows);
    expect([errorCount, codes.length]).toEqual([300, 200]);
  });
});
