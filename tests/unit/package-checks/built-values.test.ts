import { describe, expect, it } from "vitest";
import { checkHexReading } from "@/lib/domain/package-checks/hex-reading";
import { checkLimits, type FieldExtremes } from "@/lib/domain/package-checks/limits";
import { checkRoundTrip } from "@/lib/domain/package-checks/round-trip";

const field = (change: Partial<FieldExtremes> = {}): FieldExtremes => ({
  name: "zero",
  unit: "mV/V",
  min: -0.5,
  max: 0.5,
  tolerance: 5e-7,
  lowest: { value: -0.1, serial: "L" },
  highest: { value: 0.4, serial: "H" },
  ...change,
});

describe("limits", () => {
  it("passes inside and names the nearest approach", () => {
    expect(checkLimits(28, [field(), field({ name: "serialNumber", min: null, max: null })])).toMatchObject({
      verdict: "pass",
      message:
        "Decoded again, the values of 28 devices lie within the limits of 1 field. Nearest to one: zero of H: 0.4 mV/V, limit 0.5.",
    });
  });

  it("takes a value on its limit, and half a step of rounding beyond it", () => {
    expect(checkLimits(1, [field({ highest: { value: 0.5, serial: "H" } })]).verdict).toBe("pass");
    expect(checkLimits(1, [field({ highest: { value: 0.5 + 5e-7, serial: "H" } })]).verdict).toBe("pass");
    expect(checkLimits(1, [field({ lowest: { value: -0.5 - 5e-7, serial: "L" } })]).verdict).toBe("pass");
  });

  it("fails beyond, on either side, and with one limit only", () => {
    expect(checkLimits(1, [field({ highest: { value: 0.500001, serial: "H" } })])).toMatchObject({
      verdict: "fail",
      message: "1 value lies outside the layout's limits, worst zero of H: 0.500001 mV/V, limit 0.5.",
    });
    const below = { value: -0.6, serial: "L" };
    expect(checkLimits(1, [field({ lowest: below, max: null })])).toMatchObject({
      verdict: "fail",
      message: expect.stringContaining("zero of L: \u22120.6 mV/V, limit \u22120.5."),
    });
    expect(checkLimits(1, [field({ min: null })]).verdict).toBe("pass");
  });

  it("says so where the layout has no limits", () => {
    expect(checkLimits(1, [field({ min: null, max: null })])).toMatchObject({
      verdict: "pass",
      message: "The layout sets no limits.",
    });
  });
});

describe("round trip", () => {
  const facts = { devices: 2, values: 24, checksums: 2, faults: [], faultCount: 0, largestErrors: [] };

  it("passes with what was compared", () => {
    expect(checkRoundTrip(facts)).toMatchObject({
      verdict: "pass",
      message: "Decoded again, 24 values and 2 checksums of 2 devices are what was put in, to the layout's steps.",
    });
  });

  it("fails with the first value that is another, and the whole count", () => {
    const fault = { serial: "A", field: "gain", expected: 1.002, actual: 1.2 };
    expect(checkRoundTrip({ ...facts, faults: [fault], faultCount: 7 })).toMatchObject({
      verdict: "fail",
      message: "7 values do not read back: gain of A is 1.2, not 1.002.",
      evidence: { faults: { count: 7, items: [fault] } },
    });
  });
});

describe("HEX reading", () => {
  it("passes and fails", () => {
    expect(checkHexReading({ devices: 28, faults: [], faultCount: 0 }).verdict).toBe("pass");
    const faults = [{ serial: "A", reader: "strict" as const, at: 17, reason: "byte 17 differs" }];
    expect(checkHexReading({ devices: 28, faults, faultCount: 1 })).toMatchObject({
      verdict: "fail",
      message: "1 HEX file reads otherwise than the image: A: byte 17 differs (strict reader).",
    });
  });
});
