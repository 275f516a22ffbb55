import { describe, expect, it } from "vitest";
import { formatField, formatFieldChange } from "@/lib/domain/format/field-value";

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

describe("a change of a field", () => {
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
