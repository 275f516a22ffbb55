import { describe, expect, it } from "vitest";
import { formatQuantity, formatQuantityWithUnit, toEngineering } from "@/lib/domain/format/quantity";

describe("formatQuantity", () => {
  it.each([
    ["gainTc", -418.05e-6, "\u2212418.05", "ppm/K"],
    ["zero", -0.013908, "\u221213.908", "µV/V"],
    ["zeroTc", 4.91e-6, "4.91", "nV/V/K"],
    ["tempSlope", 0.1241, "0.124100", "°C/unit"],
    ["temperature", 39.9, "39.90", "°C"],
    ["intervals", 0.36, "0.36", "v"],
    ["spanErrorPpm", -119.94, "\u2212119.9", "ppm"],
  ] as const)("shows %s %d as %s %s", (name, stored, figure, unit) => {
    expect(formatQuantity(name, stored)).toBe(figure);
    expect(formatQuantityWithUnit(name, stored)).toBe(`${figure} ${unit}`);
  });

  it("shows gain without a unit and with as many digits as asked", () => {
    expect(formatQuantityWithUnit("gain", 1.0122924)).toBe("1.012292");
    expect(formatQuantityWithUnit("gain", 1.0122924, { digits: 7 })).toBe("1.0122924");
  });

  it("shows no unit behind a dash", () => {
    expect(formatQuantityWithUnit("gainTc", null)).toBe("—");
  });
});

describe("toEngineering", () => {
  it("turns stored units into the ones that people read", () => {
    expect(toEngineering(-0.00409, "mV/V").unit).toBe("µV/V");
    expect(toEngineering(-0.00409, "mV/V").value).toBeCloseTo(-4.09, 12);
    expect(toEngineering(-417.88508e-6, "1/K").value).toBeCloseTo(-417.88508, 9);
  });

  it("leaves units that it does not know", () => {
    expect(toEngineering(20, "°C")).toEqual({ value: 20, unit: "°C" });
    expect(toEngineering(7, null)).toEqual({ value: 7, unit: "" });
  });
});
