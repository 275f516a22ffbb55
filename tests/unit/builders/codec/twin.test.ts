import { describe, expect, it } from "vitest";
import { decodeImage, encodeImage } from "@/builders/codec/image";
import { type Twin, twinOf } from "@/builders/codec/twin/twin";
import { twinErrors } from "@/builders/codec/twin/twin-errors";
import { twinRange } from "@/builders/codec/twin/twin-range";
import { derive } from "@/lib/domain/compensation/derive";
import type { DevicePoint } from "@/lib/domain/compensation/types";
import { readGolden } from "@/tests/reference/codec/golden";
import { readFamily, readJson, readLot } from "@/tests/unit/compensation/golden-example";

const family = {
  ...readFamily("family.json"),
  referenceC: 20,
  nominalMvV: 2,
  capacityKg: 20,
  accuracyClass: "C" as const,
  intervals: 3000,
  pLc: 0.7,
  vMinRatioY: 10_000,
  temperatureMinC: -10,
  temperatureMaxC: 40,
};
const point = (chamberC: number, zeroMvV: number, spanMvV: number | null): DevicePoint => ({
  purpose: "sample",
  point: chamberC,
  chamberC,
  deviceTemp: chamberC,
  zeroMvV,
  spanMvV,
});
const twin = (change: Partial<Twin["coefficients"]> = {}): Twin => ({
  coefficients: { tempOffset: 0, tempSlope: 1, zero: 0, zeroTc: 0, gain: 1, gainTc: 0, ...change },
  referenceTemperature: 20,
});

describe("errors at the readings", () => {
  it("name the temperature of the worst span error, with its sign", () => {
    const points = [point(10, 0, 2.0001), point(40, 0, 1.9997)];
    const { span, spanErrorPpm } = twinErrors(twin(), points, points, family);
    // Error −1.5e-4; step end 3,000 v decides between 500/0.35, 2,000/0.7 and 3,000/1.05.
    expect(span).toMatchObject({ chamberC: 40, point: 40, purpose: "sample", roundingPpm: null });
    expect(span?.errorPpm).toBeCloseTo(-150, 6);
    expect(span?.ratio).toBeCloseTo((1.5e-4 * 3000) / 1.05, 9);
    expect(spanErrorPpm).toBe(span?.errorPpm);
  });

  it("name the two temperatures of the worst zero shift", () => {
    const points = [point(-10, 0, null), point(20, 0.0003, null), point(40, 0.0001, null)];
    const { zero, span } = twinErrors(twin(), points, points, family);
    expect(span).toBeNull();
    // |Δy0|/N·Y·5 K/|ΔT|/pLc of R 60: 0.0003 over 30 K and 0.0002 over 20 K use the same share.
    expect(zero?.ratio).toBeCloseTo((0.0002 / 2) * 10_000 * (5 / 20) * (1 / 0.7), 9);
    const steeper = [point(-10, 0, null), point(20, 0.0003, null), point(40, -0.0001, null)];
    expect(twinErrors(twin(), steeper, steeper, family).zero).toMatchObject({ betweenC: [20, 40] });
  });

  it("tell the part that rounding makes", () => {
    const points = [point(10, 0.01, 2), point(40, 0.012, 2)];
    const exact = twin({ zero: 0.01, zeroTc: 1e-4 });
    const stored = twin({ zero: 0.01, zeroTc: 1.1e-4, gain: 1.000_01 });
    const { span, zero } = twinErrors(stored, points, points, family, exact);
    expect(span?.roundingPpm).toBeCloseTo(10, 6);
    expect(span?.largestRoundingPpm).toBeCloseTo(10, 6);
    // 1e-5 mV/V/K too much over 30 K.
    expect(zero?.roundingRatio).toBeCloseTo(((30e-5 * 1.000_01 - 1e-5 * 1e-3) / 2) * 10_000 * (5 / 30) * (1 / 0.7), 3);
  });

  it("say nothing of rounding without the exact coefficients, and none where they are stored exactly", () => {
    const points = [point(10, 0, 2.0001), point(40, 0, 1.9997)];
    expect(twinErrors(twin(), points, points, family).zero?.roundingRatio).toBeNull();
    const { span, zero } = twinErrors(twin(), points, points, family, twin());
    expect([span?.roundingPpm, span?.largestRoundingPpm, zero?.roundingRatio]).toEqual([0, 0, 0]);
  });

  it("give nothing without points", () => {
    expect(twinErrors(twin(), [], [], family)).toEqual({
      spanErrorPpm: null,
      spanRatio: null,
      zeroShiftRatio: null,
      span: null,
      zero: null,
    });
  });
});

// Source of the expected figures: tests/fixtures/golden, by an independent program.
describe("the twin of the golden lot", () => {
  const golden = readGolden(".", "MW20-2609");
  const rules = readFamily("family.json");
  const { exclude = [], verification } = readJson<{
    exclude?: string[];
    verification: Record<string, { spanErrorPpm: number; spanRatio: number }>;
  }>("expected-coefficients.json");
  const derived = derive({
    family: rules,
    method: "pooled-gain",
    order: 1,
    runs: readLot(""),
    exclude: exclude.map((serial) => ({ serial, reason: "as in the example" })),
  });
  const judged = golden.sources.map((sources) => {
    const { serial } = sources.device;
    const points = derived.devices.find((one) => one.serial === serial)?.points ?? [];
    const decoded = decodeImage(golden.compiled, encodeImage(golden.compiled, sources));
    const stored = twinOf(golden.compiled, decoded, { referenceTemperature: rules.referenceC });
    const exact: Twin = { coefficients: sources.coefficients, referenceTemperature: rules.referenceC };
    return { serial, points, stored, exact, errors: twinErrors(stored, points, points, rules, exact) };
  });

  it("differs from the expected errors by its rounding and nothing else", () => {
    expect(Object.keys(verification).length).toBeGreaterThan(0);
    for (const [serial, expected] of Object.entries(verification)) {
      const span = judged.find((one) => one.serial === serial)?.errors.span;
      expect((span?.errorPpm as number) - (span?.roundingPpm as number)).toBeCloseTo(expected.spanErrorPpm, 6);
    }
  });

  it("overflows nowhere in the family's range, where rounding stays small", () => {
    for (const { stored, exact } of judged) {
      const range = twinRange(stored, exact, rules);
      expect(range.overflow).toBeNull();
      expect(range.spanRounding?.ppm).toBeLessThan(5);
      expect(range.zeroRounding?.mvV).toBeLessThan(5e-6);
    }
  });
});

describe("the family's range", () => {
  it("takes rounding at every temperature of it, measured or not", () => {
    const range = twinRange(twin({ gainTc: 1e-7, zeroTc: 1e-8 }), twin(), family);
    // The reference is 20 °C, so −10 °C is the farthest end.
    expect(range.spanRounding?.atC).toBe(-10);
    expect(range.spanRounding?.ppm).toBeCloseTo(3, 9);
    expect(range.zeroRounding?.mvV).toBeCloseTo(3e-7, 11);
  });

  it("carries a thermometer's rounding into zero and gain", () => {
    const exact = twin({ zeroTc: 1e-5, gainTc: 1e-4 });
    const range = twinRange(twin({ zeroTc: 1e-5, gainTc: 1e-4, tempOffset: 0.1 }), exact, family);
    expect(range.zeroRounding?.mvV).toBeCloseTo(1e-6, 8);
    expect(range.spanRounding?.ppm).toBeCloseTo(10, 1);
  });

  it.each([
    ["gain", { gainTc: 0.05 }],
    ["zero", { zeroTc: 1e38 }],
  ])("tells an overflow of the %s", (quantity, change) => {
    expect(twinRange(twin(change), twin(), family)).toMatchObject({
      overflow: { quantity, atC: -10 },
      spanRounding: null,
      zeroRounding: null,
    });
  });

  it("tells a thermometer without a slope", () => {
    expect(twinRange(twin(), twin({ tempSlope: 0 }), family).overflow).toEqual({ quantity: "temperature", atC: -10 });
  });
});
