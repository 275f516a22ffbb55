import { describe, expect, it } from "vitest";
import { listRunFindings } from "@/lib/domain/compensation/run-findings";
import { listSetPointFindings } from "@/lib/domain/compensation/set-points";
import type { Finding, Purpose, Reading } from "@/lib/domain/compensation/types";
import { finish } from "@/lib/domain/steps";
import { family, idealCell, madeUpRun, type RowErrors } from "./made-up-run";

const cells = ["A", "B", "C"].map((serial) => idealCell(serial));
const loads = [0, 12, 0, 12];
const temperaturesC = [10, 25, 40];

const readingsOf = (
  errors: RowErrors = {},
  temperatures: readonly number[] = temperaturesC,
  purpose: Purpose = "sample",
) => [...madeUpRun({ purpose, temperaturesC: temperatures, loads }, cells, errors).readings];

/** Findings that are not notes, of readings changed by a function. */
function findingsOf(
  change: (readings: Reading[]) => unknown,
  readings = readingsOf(),
  purpose: Purpose = "sample",
): Finding[] {
  change(readings);
  return listRunFindings(family, purpose, readings).filter((one) => one.severity !== "note");
}

const of = (readings: Reading[], serial: string, point: number) =>
  readings.filter((row) => row.serial === serial && row.point === point);

describe("a clean run", () => {
  it("has nothing to decide", () => {
    expect(findingsOf(() => undefined)).toEqual([]);
    expect(findingsOf(() => undefined, readingsOf({}, [20, 40, 10, 20]))).toEqual([]);
  });
});

/** Rows stand six minutes apart, so that four of them span 18 min: 0.1 K in 15 min is 0.12 K over them. */
describe("thermometer.drifting", () => {
  const drift = (perMinuteK: number) => (readings: Reading[]) =>
    of(readings, "A", 2).forEach((row, i) => {
      row.deviceTemp += (i * 6 * perMinuteK) / 0.125;
    });

  it("is found from repeats of one point, in K through the thermometer, and says how fast", () => {
    const [finding, ...others] = findingsOf(drift(0.02));
    expect(others).toEqual([]);
    expect(finding).toMatchObject({ code: "thermometer.drifting", severity: "soft", serial: "A", point: 2 });
    expect(finding?.data).toMatchObject({ limitK: 0.1, minutes: 18 });
    expect(finding?.data?.driftK).toBeCloseTo(0.3, 6);
    expect(finding?.message).toContain("0.3 K in 15 min");
  });

  it("is not found where the device is steady, nor at 0.1 K in 15 min", () => {
    expect(findingsOf(drift(0.1 / 15 - 1e-6))).toEqual([]);
    expect(findingsOf(drift(0.1 / 15))).toEqual([]);
    expect(findingsOf(drift(0.1 / 15 + 1e-5))).toHaveLength(1);
    expect(findingsOf(drift(-0.1 / 15 - 1e-5))).toHaveLength(1);
  });

  it("allows noise of two readings six minutes apart, 0.04 + 0.03 K, and no more", () => {
    const two = (changeK: number) => (readings: Reading[]) => {
      const [first, second] = of(readings, "A", 2);
      for (const row of of(readings, "A", 2))
        if (row !== first && row !== second) readings.splice(readings.indexOf(row), 1);
      if (second) second.deviceTemp += changeK / 0.125;
    };
    expect(findingsOf(two(0.0699))).toEqual([]);
    expect(findingsOf(two(0.0701)).map((one) => one.code)).toEqual(["thermometer.drifting"]);
  });

  it("says nothing where the run gives the thermometer no scale, or a point has one row", () => {
    expect(findingsOf(drift(1), readingsOf({}, [20], "span"), "span")).toEqual([]);
    const single = readingsOf().filter((row) => row.loadKg === 0 && row.soakMin === 100);
    expect(findingsOf(() => undefined, single, "zero")).toEqual([]);
  });

  it("is gathered over the devices of a point, the fastest told", () => {
    const all = (readings: Reading[]) =>
      readings.forEach((row) => {
        if (row.point === 1) row.deviceTemp += ((row.soakMin - 100) * (row.serial === "B" ? 0.05 : 0.02)) / 0.125;
      });
    const found = findingsOf(all);
    expect(found).toHaveLength(1);
    expect(found[0]).toMatchObject({ serial: null, point: 1, data: { devices: 3, serials: ["A", "B", "C"] } });
    // The drift tilts the scale of that run's thermometers by 1.5 % as well.
    expect(found[0]?.data?.driftK).toBeCloseTo(0.75, 1);
  });
});

describe("dwell.differs", () => {
  const dwell =
    (...seconds: number[]) =>
    (readings: Reading[]) => {
      for (const row of readings) if (row.loadKg > 0) row.dwellS = seconds[row.point - 1] ?? null;
    };

  it("is found beyond both 10 s and a fifth, between points of one device", () => {
    const [finding] = findingsOf(dwell(30, 30, 75));
    expect(finding).toMatchObject({
      code: "dwell.differs",
      severity: "soft",
      data: { shortestS: 30, longestS: 75, devices: 3 },
    });
  });

  it("is not found below either, at the limits, or where no dwell is noted", () => {
    expect(findingsOf(dwell(20, 30, 30))).toEqual([]);
    expect(findingsOf(dwell(20, 30.1, 30)).map((one) => one.code)).toEqual(["dwell.differs"]);
    expect(findingsOf(dwell(100, 120, 110))).toEqual([]);
    expect(findingsOf(dwell(100, 120.1, 110)).map((one) => one.code)).toEqual(["dwell.differs"]);
    expect(findingsOf(dwell(30))).toEqual([]);
  });
});

/** p_LC·v_min = 0.7·(3000/10000) v = 0.21 v, or 1.4·10⁻⁴ mV/V. */
describe("zero.return_difference", () => {
  const shift = (mvV: number) => (readings: Reading[]) => {
    for (const row of readings) if (row.point === 4) row.signalMvV += mvV;
  };
  const returning = (backC = 20) => readingsOf({}, [20, 40, 10, backC]);

  it("is found where zero does not come back, against what one step of temperature may do", () => {
    const [finding] = findingsOf(shift(2e-4), returning());
    expect(finding).toMatchObject({ code: "zero.return_difference", severity: "soft", point: 4 });
    expect(finding?.data?.changeV).toBeCloseTo(0.3, 9);
    expect(finding?.data?.limitV).toBeCloseTo(0.21, 9);
  });

  it("is not found at the limit, nor for the drift between 20 and 21 °C", () => {
    expect(findingsOf(shift(1.4e-4), returning())).toEqual([]);
    expect(findingsOf(shift(1.401e-4), returning())).toHaveLength(1);
    const drifting = cells.map((cell) => ({ ...cell, zeroTc: 5e-4 }));
    const run = madeUpRun({ purpose: "sample", temperaturesC: [20, 40, 10, 21], loads }, drifting);
    expect(findingsOf(() => undefined, [...run.readings])).toEqual([]);
  });

  it("is not looked for between temperatures more than 2 K apart", () => {
    expect(findingsOf(shift(5e-4), returning(23))).toEqual([]);
  });
});

describe("reading.duplicate", () => {
  const again = (change: Partial<Reading>) => (readings: Reading[]) => {
    const row = readings[1] as Reading;
    readings.push({ ...row, row: 99, ...change });
  };

  it("is found where a row stands twice, and names both", () => {
    const [finding, ...others] = findingsOf(again({}));
    expect(others).toEqual([]);
    expect(finding).toMatchObject({
      code: "reading.duplicate",
      severity: "soft",
      serial: "A",
      data: { row: 99, earlier: 3 },
    });
  });

  it("is not found where a figure or the second differs", () => {
    const codes = (change: Partial<Reading>) => findingsOf(again(change)).map((one) => one.code);
    expect(codes({ signalMvV: 1.19 })).not.toContain("reading.duplicate");
    expect(codes({ takenAt: "2026-03-02T09:46:01.000Z" })).not.toContain("reading.duplicate");
  });
});

describe("clock.points_overlap", () => {
  const move = (minutes: number) => (readings: Reading[]) => {
    for (const row of of(readings, "A", 2))
      row.takenAt = new Date(Date.parse(row.takenAt) - minutes * 60_000).toISOString();
  };

  it("is found where two points were taken at the same time", () => {
    const [finding, ...others] = findingsOf(move(170));
    expect(others).toEqual([]);
    expect(finding).toMatchObject({
      code: "clock.points_overlap",
      severity: "soft",
      serial: "A",
      data: { point: 2, other: 1 },
    });
  });

  it("is not found where one starts when the other ends, nor for points in another order", () => {
    expect(findingsOf(move(162))).toEqual([]);
    expect(findingsOf(move(162.01))).toHaveLength(1);
    expect(findingsOf(move(400))).toEqual([]);
  });
});

describe("clock.backwards", () => {
  it("is found where a longer soak was taken earlier, and not where both rise", () => {
    const earlier = (minutes: number) => (readings: Reading[]) => {
      const row = of(readings, "A", 1)[2] as Reading;
      row.takenAt = new Date(Date.parse(row.takenAt) - minutes * 60_000).toISOString();
    };
    expect(findingsOf(earlier(7)).map((one) => one.code)).toContain("clock.backwards");
    expect(findingsOf(earlier(6)).map((one) => one.code)).not.toContain("clock.backwards");
  });
});

describe("chamber.off_set_point", () => {
  const readings = readingsOf();
  const planned = (setC: number) => finish(listSetPointFindings(readings, [{ point: 2, setC }]));

  it("is found beyond 2 K (OIML R 60-2, 2.10.1), gathered over the devices", () => {
    const [finding, ...others] = planned(22.5);
    expect(others).toEqual([]);
    expect(finding).toMatchObject({
      code: "chamber.off_set_point",
      severity: "soft",
      point: 2,
      data: { chamberC: 25, setC: 22.5, toleranceK: 2, devices: 3 },
    });
  });

  it("is not found at 2 K, within them, or for a point without a plan", () => {
    expect(planned(23)).toEqual([]);
    expect(planned(27)).toEqual([]);
    expect(planned(27.001)).toHaveLength(1);
    expect(finish(listSetPointFindings(readings, [{ point: 9, setC: 80 }]))).toEqual([]);
    expect(finish(listSetPointFindings(readings, [{ point: 2, setC: 24 }], 0.5))).toHaveLength(1);
  });
});

describe("findings on the family's rules", () => {
  const each = (change: (row: Reading) => unknown) => (readings: Reading[]) => {
    for (const row of readings) change(row);
  };
  it.each<[string, (readings: Reading[]) => unknown, number]>([
    ["soak.too_short", each((row) => (row.soakMin -= 11)), 3],
    ["load.below_threshold", each((row) => (row.loadKg *= 0.8)), 3],
    ["load.above_capacity", each((row) => (row.loadKg *= 2)), 3],
    ["span.temperature_too_small", (rows) => rows.splice(0, rows.length, ...readingsOf({}, [10, 25, 29.9])), 1],
    ["repeats.scatter", (rows) => ((rows[0] as Reading).signalMvV += 3e-4), 1],
    ["point.unstable", (rows) => ((rows[0] as Reading).chamberC += 2.1), 1],
    [
      "load.missing",
      (rows) => rows.splice(0, rows.length, ...rows.filter((row) => row.point !== 1 || row.loadKg === 0)),
      1,
    ],
  ])("finds %s", (code, change, count) => {
    expect(findingsOf(change).filter((one) => one.code === code)).toHaveLength(count);
  });

  it("finds none of them at their limits", () => {
    expect(findingsOf(each((row) => (row.soakMin -= 10)))).toEqual([]);
    const atThreshold = madeUpRun({ purpose: "sample", temperaturesC: [10, 30], loads: [0, 10, 0, 10] }, cells);
    expect(findingsOf(() => undefined, [...atThreshold.readings])).toEqual([]);
    expect(findingsOf((rows) => ((rows[0] as Reading).signalMvV += 2.2e-4))).toEqual([]);
  });

  it("finds a thermometer that does not follow, one temperature alone, and a copied block", () => {
    const codes = (change: (rows: Reading[]) => unknown) => findingsOf(change).map((one) => one.code);
    expect(
      codes((rows) => {
        for (const row of of(rows, "A", 2)) row.deviceTemp += 200;
      }),
    ).toContain("thermometer.not_monotonic");
    const flat = listRunFindings(family, "zero", readingsOf({}, [20, 22, 24]));
    expect(flat.map((one) => one.code)).toContain("temperatures.not_distinct");
    const copies = listRunFindings(family, "sample", readingsOf());
    expect(copies.find((one) => one.code === "reading.copied")).toMatchObject({
      severity: "note",
      data: { devices: 2 },
    });
  });

  it("notes a missing point, no return, and a span run far from the reference", () => {
    const missing = readingsOf().filter((row) => row.serial !== "B" || row.point !== 3);
    expect(listRunFindings(family, "sample", missing)).toContainEqual(
      expect.objectContaining({ code: "point.missing", severity: "note", serial: "B", point: 3 }),
    );
    const notes = (temperatures: number[], purpose: Purpose) =>
      listRunFindings(family, purpose, readingsOf({}, temperatures, purpose)).map((one) => one.code);
    expect(notes([10, 40], "sample")).toContain("point.no_return");
    expect(notes([20, 40, 20.4], "sample")).not.toContain("point.no_return");
    expect(notes([25.1], "span")).toContain("span.far_from_reference");
    expect(notes([25], "span")).not.toContain("span.far_from_reference");
  });

  it("finds a reading that stands out from five repeats", () => {
    const many = madeUpRun({ purpose: "zero", temperaturesC: [10, 40], loads: [0, 0, 0, 0, 0, 0] }, [idealCell("A")], {
      signalMvV: (row) => ((row.row * 7) % 5) * 1e-6,
    });
    const rows = [...many.readings];
    expect(findingsOf(() => undefined, rows, "zero")).toEqual([]);
    (rows[2] as Reading).signalMvV += 2e-4;
    expect(findingsOf(() => undefined, rows, "zero").map((one) => one.code)).toContain("reading.outlier");
  });
});
