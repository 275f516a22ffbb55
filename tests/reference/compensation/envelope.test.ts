import { describe, expect, it } from "vitest";
import {
  decisiveLoads,
  maximumPermissibleError,
  poolingLimit,
  spanErrorAtStepEnds,
  spanErrorLimit,
  spanRatio,
  zeroShiftRatio,
  zeroTcLimit,
} from "@/lib/domain/compensation/envelope";
import type { FamilyRules } from "@/lib/domain/compensation/types";

const classC: FamilyRules = {
  capacityKg: 100,
  nominalMvV: 2,
  referenceC: 20,
  accuracyClass: "C",
  intervals: 3000,
  vMinRatioY: 10_000,
  pLc: 0.7,
  temperatureMinC: -10,
  temperatureMaxC: 40,
  minSoakMinutes: 90,
  minLoadFraction: 0.5,
  minTemperatureSpanK: 20,
  temperatureShare: 0.7,
  coverage: 0.95,
  confidence: 0.95,
};

describe("OIML R 60-1:2021, table 4", () => {
  it.each([
    ["A", 50_000, 200_000],
    ["B", 5_000, 20_000],
    ["C", 500, 2_000],
    ["D", 50, 200],
  ] as const)("steps class %s at %i and %i, an end belonging to the lower step", (accuracyClass, first, second) => {
    const rules = { accuracyClass, intervals: 10 * second, pLc: 0.7 };
    expect(maximumPermissibleError(0, rules)).toBeCloseTo(0.35, 12);
    expect(maximumPermissibleError(first, rules)).toBeCloseTo(0.35, 12);
    expect(maximumPermissibleError(first + 1, rules)).toBeCloseTo(0.7, 12);
    expect(maximumPermissibleError(second, rules)).toBeCloseTo(0.7, 12);
    expect(maximumPermissibleError(second + 1, rules)).toBeCloseTo(1.05, 12);
  });

  it.each([
    ["A", 500_000, 2.1e-6],
    ["B", 100_000, 1.05e-5],
    ["C", 10_000, 1.05e-4],
    ["D", 1_000, 1.05e-3],
    ["A", 50_000, 7e-6],
    ["B", 20_000, 3.5e-5],
    ["C", 3_000, 3.5e-4],
    ["D", 100, 7e-3],
  ] as const)("leaves class %s with n = %i a span error of %d, by hand", (accuracyClass, intervals, byHand) => {
    const rules = { accuracyClass, intervals, pLc: 0.7 };
    const ends = spanErrorAtStepEnds(1e-6, rules);
    expect(ends.map((end) => end.load)).toEqual(decisiveLoads(rules));
    expect(Math.min(...ends.map((end) => end.limit / end.load))).toBeCloseTo(byHand, 15);
    expect(spanErrorLimit(rules)).toBeCloseTo(byHand, 15);
    expect(spanRatio(byHand, rules)).toBeCloseTo(1, 12);
    expect(spanRatio(-2 * byHand, rules)).toBeCloseTo(2, 12);
    expect(Math.max(...ends.map((end) => end.ratio))).toBeCloseTo(spanRatio(1e-6, rules), 12);
  });

  /** The figures that R 60-1:2021, 5.5.1 works for class C, n = 3000, Dmax = Emax, p_LC 0.7. */
  it("allows 0.735 v of creep in 30 minutes, 0.1575 v of it in the last ten", () => {
    const mpe = maximumPermissibleError(3000, classC);
    expect(0.7 * mpe).toBeCloseTo(0.735, 12);
    expect(0.15 * mpe).toBeCloseTo(0.1575, 12);
  });

  it("judges at the ends below n, and at n", () => {
    expect(decisiveLoads(classC)).toEqual([500, 2000, 3000]);
    expect(decisiveLoads({ ...classC, intervals: 2000 })).toEqual([500, 2000]);
    expect(decisiveLoads({ ...classC, intervals: 500 })).toEqual([500]);
  });

  /** Algebra on table 4: the whole class-C budget over 30 K in ppm/K, to the digits of a hand calculation. */
  it.each([
    [1000, 23.3],
    [1500, 15.6],
    [3000, 11.67],
    [4000, 8.75],
    [6000, 5.83],
    [10_000, 3.5],
  ])("leaves n = %i at most %d ppm/K over 30 K", (intervals, ppm) => {
    expect(Math.abs((spanErrorLimit({ ...classC, intervals }) * 1e6) / 30 - ppm)).toBeLessThan(0.05);
    expect(poolingLimit({ ...classC, intervals, temperatureShare: 1 }) * 1e6).toBeCloseTo(
      (spanErrorLimit({ ...classC, intervals }) * 1e6) / 30,
      9,
    );
  });
});

describe("OIML R 60-1:2021, 5.6.1.3: output at minimum load", () => {
  it.each([
    [5_000, 28.0],
    [6_000, 23.33],
    [7_500, 18.67],
    [10_000, 14.0],
    [12_000, 11.67],
    [15_000, 9.33],
    [20_000, 7.0],
    [25_000, 5.6],
  ])("limits Y = %i to %d ppm/K", (vMinRatioY, ppm) => {
    expect(Math.abs(zeroTcLimit({ ...classC, vMinRatioY }) * 1e6 - ppm)).toBeLessThan(0.006);
  });

  it("limits class A per 2 K", () => {
    expect(zeroTcLimit({ ...classC, accuracyClass: "A" }) / zeroTcLimit(classC)).toBeCloseTo(2.5, 12);
  });

  /** Worked by hand after R 60-3:2021, 2.1.4: f = 66.6667 counts/v, unloaded counts 0, +40, −70, +4. */
  it.each([
    [0, 40, 20, 0.5],
    [40, -70, -50, 0.55],
    [-70, 4, 30, 0.6167],
  ])("turns counts %d → %d over %d K into C_M(v_min) = %d of p_LC", (from, to, kelvin, expected) => {
    const intervals = (to - from) / (150_000 / (0.75 * 3000));
    const changeMvV = (intervals / classC.intervals) * classC.nominalMvV;
    expect(Math.abs(zeroShiftRatio(changeMvV, kelvin, classC) * classC.pLc - expected)).toBeLessThan(5e-5);
  });
});
