import { parse } from "csv-parse/sync";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { isColumn, REQUIRED_COLUMNS } from "@/lib/domain/readings/columns";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";
import { POSITION_FORM, placeSerials } from "@/lib/domain/run-plan/positions";
import { countPlannedRows, PLAN_ROWS_MAX, soakMinutesOf } from "@/lib/domain/run-plan/run-plan";
import { planTemplate } from "@/lib/domain/run-plan/template";
import { goodPlan, point, serials } from "./plan-facts";

const rowsOf = (csv: string) => parse(csv, { columns: true }) as Record<string, string>[];

describe("planTemplate", () => {
  it("has every column that readings need, under its name", () => {
    const [header = ""] = planTemplate(goodPlan()).split("\n");
    const names = header.split(",");
    for (const name of names) expect(isColumn(name)).toBe(true);
    expect(names).toEqual(expect.arrayContaining([...REQUIRED_COLUMNS]));
    expect(names).not.toContain("output_mv_v");
    expect(planTemplate(goodPlan({ purpose: "proof" })).split("\n")[0]).toContain("output_mv_v");
  });

  it("has a row for each planned reading, whatever places are called", () => {
    const position = fc
      .tuple(fc.constantFrom("P", "7", "é", "Ω"), fc.string({ unit: "grapheme", maxLength: 8 }))
      .map((parts) => parts.join("").trim())
      .filter((text) => POSITION_FORM.test(text));
    fc.assert(
      fc.property(
        fc.uniqueArray(position, { minLength: 1, maxLength: 6 }),
        fc.integer({ min: 1, max: 4 }),
        (places, repeats) => {
          const devices = places.map((place, i) => ({ serial: `S-${i}`, position: place }));
          const plan = goodPlan({ devices, points: [point(1, 10, { repeats }), point(2, 40, { loadsKg: [10, 20] })] });
          const rows = rowsOf(planTemplate(plan));
          expect(rows).toHaveLength(countPlannedRows(plan));
          expect(new Set(rows.map((row) => row.position))).toEqual(new Set(places));
        },
      ),
    );
  });

  it("is taken as readings once the measured cells are filled, by a reader that was not told of plans", async () => {
    const rows = rowsOf(planTemplate(goodPlan()));
    const filled = rows.map((row, i) => ({
      ...row,
      chamber_c: "20.1",
      soak_min: "95",
      device_temp: "1900",
      signal_mv_v: "0.1",
      taken_at: new Date(Date.UTC(2026, 0, 1, 0, i)).toISOString(),
      dwell_s: "",
    }));
    const header = Object.keys(rows[0] as object);
    const csv = [header, ...filled.map((row) => header.map((name) => (row as Record<string, string>)[name]))].join(
      "\n",
    );
    const { readings, errors } = await parseReadingsCsv(Buffer.from(csv));
    expect(errors).toEqual([]);
    expect(readings).toHaveLength(rows.length);
  });

  it("counts against the bound that uploads have (DEVELOPERS.md), and adds up what has to be waited for", () => {
    expect(PLAN_ROWS_MAX).toBe(600_000);
    expect(soakMinutesOf(goodPlan().points)).toBe(360);
  });
});

describe("placeSerials", () => {
  it("numbers places on, with zeros in front", () => {
    expect(placeSerials(serials(3), { prefix: " A-", from: 9, digits: 2 })).toEqual([
      { serial: "S-1", position: "A-09" },
      { serial: "S-2", position: "A-10" },
      { serial: "S-3", position: "A-11" },
    ]);
  });
});
