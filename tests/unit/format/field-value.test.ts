import { describe, expect, it } from "vitest";
import { formatDecoded, formatField, formatFieldChange } from "@/lib/domain/format/field-value";

describe("a decoded field", () => {
  it("stands in its engineering unit", () => {
    expect(formatField(-4.178912e-4, "1/K")).toEqual({ text: "−417.89", unit: "ppm/K" });
    expect(formatField(-0.00409, "mV/V")).toEqual({ text: "−4.090", unit: "µV/V" });
    expect(formatField(1.01229214, "1")).toEqual({ text: "1.012292", unit: "" });
  });

  it("without a unit stands as it is", () => {
    expect(formatField(2, null)).toEqual({ text: "2", unit: "" });
    expect(formatField(44177, null)).toEqual({ text: "44177", unit: "" });
    expect(formatField(0.061855670064687729, "°C/1")).toEqual({ text: "0.0618556701", unit: "°C/1" });
    expect(formatField(-0.125, null).text).toBe("−0.125000000");
    expect(formatField(2.5e-9, null).text).toBe("2.50000000e−9");
  });

  it("says so where there is no value", () => {
    expect(formatField(null, "1/K").text).toBe("no value");
    expect(formatField("MW20-2609-00011", null).text).toBe("MW20-2609-00011");
  });
});

describe("a field as decoded from an image", () => {
  const decoded = (
    value: number | string | null,
    raw: string,
    unit: string | null = null,
    source: string | null = null,
  ) => formatDecoded({ value, unit, raw, source });

  it("has hex digits in capitals and a true minus sign before 64-bit integers of either byte order", () => {
    expect(decoded("5aa50f", "5aa50f").text).toBe("5AA50F");
    expect(decoded("-9223372036854775808", "8000000000000000").text).toBe("−9223372036854775808");
    expect(decoded("-2", "feffffffffffffff").text).toBe("−2");
    expect(decoded("18446744073709551615", "ffffffffffffffff").text).toBe("18446744073709551615");
  });

  it("leaves texts as they are, even such as look like numbers", () => {
    expect(decoded("-1234567", "2d31323334353637").text).toBe("-1234567");
    expect(decoded("ab", "6162").text).toBe("ab");
  });

  it("tells the nominal output as the family has it", () => {
    expect(decoded(2, "00000040", "mV/V", "family.nominalOutput")).toEqual({ text: "2", unit: "mV/V" });
    expect(decoded(Math.fround(2.2), "cdcc0c40", "mV/V", "family.nominalOutput").text).toBe("2.2");
    expect(decoded(0.0125, "", "mV/V", "coefficients.zero")).toEqual({ text: "12.500", unit: "µV/V" });
    expect(decoded(null, "ffff", "1/K").text).toBe("no value");
  });
});

describe("a change of a field", () => {
  it("shows two significant digits of what the decimals can't show", () => {
    const step = (to: number) => formatFieldChange({ from: 0, to, unit: "°C/1", steps: null }).step;
    expect(step(3.24e-12)).toBe("+3.2e−12 °C/1");
    expect(step(-3.24e-12)).toBe("−3.2e−12 °C/1");
    expect(step(3.24e-9)).toBe("+0.0000000032 °C/1");
    expect(step(0)).toBe("0.00 °C/1");
  });

  it("names the step in the unit and in stored steps", () => {
    const change = formatFieldChange({ from: -4.1789e-4, to: -4.1805e-4, unit: "1/K", steps: -160_000 });
    expect(change).toEqual({ from: "−417.89", to: "−418.05", unit: "ppm/K", step: "−0.16 ppm/K", lsb: "−160,000" });
  });

  it("takes as many decimals as it needs to be seen", () => {
    const change = formatFieldChange({ from: 1.01229214, to: 1.01229238, unit: "1", steps: 1044 });
    expect(change).toEqual({ from: "1.01229214", to: "1.01229238", unit: "", step: "+0.24 ppm", lsb: "+1,044" });
  });

  it("of a version number has stored steps only", () => {
    const change = formatFieldChange({ from: 1, to: 2, unit: null, steps: 1 });
    expect(change).toEqual({ from: "1", to: "2", unit: "", step: undefined, lsb: "+1" });
  });

  it("lines up with others by the decimals of the least of them", () => {
    const change = { from: 0.99609263, to: 0.99609296, unit: "1", steps: 1398 };
    expect(formatFieldChange(change, -5e-8)).toMatchObject({
      from: "0.996092630",
      to: "0.996092960",
      step: "+0.330 ppm",
    });
  });

  it("from or to nothing has no step", () => {
    const change = formatFieldChange({ from: null, to: 20, unit: "°C", steps: null });
    expect(change).toMatchObject({ from: null, to: "20.000", step: undefined, lsb: undefined });
  });
});
