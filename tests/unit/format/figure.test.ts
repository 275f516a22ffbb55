import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { formatCount, formatFigure, formatGiven, formatNumberOf, formatPercent } from "@/lib/domain/format/figure";

describe("formatGiven", () => {
  it("keeps all digits and writes true minus signs", () => {
    expect(formatGiven(-10.01)).toBe("\u221210.01");
    expect(formatGiven(-2e-9)).toBe("\u22122e\u22129");
    expect(formatGiven(40)).toBe("40");
  });
});

describe("formatFigure", () => {
  it("writes a true minus sign and fixed decimals", () => {
    expect(formatFigure(-418.0498, { digits: 2 })).toBe("\u2212418.05");
    expect(formatFigure(0.996093, { digits: 6 })).toBe("0.996093");
  });

  it("writes a plus only where it is asked for", () => {
    expect(formatFigure(0.24)).toBe("0.24");
    expect(formatFigure(0.24, { sign: "always" })).toBe("+0.24");
  });

  it("gives no sign to what rounds to nothing", () => {
    expect(formatFigure(-0.0004, { digits: 2, sign: "always" })).toBe("0.00");
    expect(formatFigure(-0)).toBe("0.00");
  });

  it("shows a value without basis as a dash, never as 0", () => {
    for (const missing of [null, undefined, Number.NaN, Number.POSITIVE_INFINITY]) {
      expect(formatFigure(missing)).toBe("—");
    }
  });

  it("separates thousands left of the decimal point only", () => {
    expect(formatFigure(-1234567.1234567, { digits: 7, group: true })).toBe("\u22121,234,567.1234567");
    expect(formatFigure(999, { digits: 0, group: true })).toBe("999");
  });

  it("reads back to within half of the last decimal", () => {
    fc.assert(
      fc.property(fc.double({ min: -1e6, max: 1e6, noNaN: true }), fc.integer({ min: 0, max: 8 }), (value, digits) => {
        const shown = formatFigure(value, { digits, group: true }).replace("\u2212", "-").replaceAll(",", "");
        expect(Math.abs(Number(shown) - value)).toBeLessThanOrEqual(0.5 * 10 ** -digits * (1 + 1e-6) + 1e-9);
      }),
    );
  });
});

it("counts with thousands separated", () => {
  expect(formatCount(50_000)).toBe("50,000");
  expect(formatCount(null)).toBe("—");
});

it("puts the noun into its number", () => {
  expect(formatNumberOf(1, "device")).toBe("1 device");
  expect(formatNumberOf(1_200, "device")).toBe("1,200 devices");
  expect(formatNumberOf(0, "family", "families")).toBe("0 families");
});

it("writes a share in per cent", () => {
  expect(formatPercent(0.95)).toBe("95 %");
  expect(formatPercent(0.5493, 1)).toBe("54.9 %");
});
