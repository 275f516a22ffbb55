import { describe, expect, it } from "vitest";
import { derive } from "@/lib/domain/compensation/derive";
import type { DerivationResult, Finding, Method } from "@/lib/domain/compensation/types";
import { family, type IdealCell, idealCell, madeUpRun, seededNormal } from "./made-up-run";

const normal = seededNormal(41);

/** Cells of a lot as the trade knows them: every parameter scatters. */
function lotOf(count: number, change: (i: number) => Partial<IdealCell> = () => ({})): IdealCell[] {
  return Array.from({ length: count }, (_, i) =>
    idealCell(`D${String(i).padStart(4, "0")}`, {
      zero: -0.006 + 0.012 * normal(),
      zeroTc: 2.6e-5 * normal(),
      gain: 1 + 0.008 * normal(),
      gainTc: -4.18e-4 + 1.5e-6 * normal(),
      tempOffset: -230 + 1.4 * normal(),
      tempSlope: 0.124 + 0.0006 * normal(),
      ...change(i),
    }),
  );
}

function deriveOf(cells: readonly IdealCell[], method: Method = "individual"): DerivationResult {
  const runs = [madeUpRun({ purpose: "sample", temperaturesC: [10, 40], loads: [0, 12, 0, 12] }, cells)];
  return derive({ family, method, order: 1, runs, exclude: [] });
}

const CODES = [
  "coefficient.outlier",
  "coefficient.sign_unlike",
  "thermometer.off_siblings",
  "coefficient.many_outliers",
];

function found(result: DerivationResult): Finding[] {
  const all = [...result.findings, ...result.devices.flatMap((device) => device.findings)];
  return all.filter((one) => CODES.includes(one.code));
}

describe("a lot whose devices are alike", () => {
  it.each([6, 28, 300])("has no finding among %s", (count) => {
    expect(found(deriveOf(lotOf(count)))).toEqual([]);
    expect(found(deriveOf(lotOf(count), "pooled-gain"))).toEqual([]);
  });

  it("has none where devices are equal to rounding, whatever the scores would be", () => {
    expect(found(deriveOf(Array.from({ length: 20 }, (_, i) => idealCell(`E${i}`))))).toEqual([]);
  });
});

describe("coefficient.outlier", () => {
  it.each([
    ["zero", { zero: 0.2 }],
    ["zeroTc", { zeroTc: 4e-4 }],
    ["gain", { gain: 1.1 }],
    ["gainTc", { gainTc: -3.9e-4 }],
  ] as const)("names %s with value, median, tests and effect", (coefficient, change) => {
    const findings = found(deriveOf(lotOf(40, (i) => (i === 7 ? change : {}))));
    expect(findings).toHaveLength(1);
    expect(findings[0]).toMatchObject({ code: "coefficient.outlier", severity: "soft", serial: "D0007" });
    expect(findings[0]?.data).toMatchObject({ coefficient });
    expect(findings[0]?.data?.score).toBeGreaterThan(findings[0]?.data?.threshold as number);
    expect(findings[0]?.data?.g).toBeGreaterThan(findings[0]?.data?.critical as number);
    expect(findings[0]?.data?.intervals).toBeGreaterThan(0.1);
    expect(findings[0]?.message).toMatch(new RegExp(`^${coefficient} .* stands out`));
  });

  it("tests the sample's gainTc by Grubbs at 5 % as the lot's mean rests on it, and only the sample's", () => {
    const odd = (i: number) => (i === 3 ? { gainTc: -4.05e-4 } : { gainTc: -4.18e-4 + (i - 3) * 1e-6 });
    const findings = found(deriveOf(lotOf(7, odd), "pooled-gain"));
    expect(findings).toMatchObject([{ code: "coefficient.outlier", serial: "D0003", data: { coefficient: "gainTc" } }]);
    const cells = lotOf(12);
    const runs = [
      madeUpRun({ purpose: "sample", temperaturesC: [10, 40], loads: [0, 12] }, cells.slice(0, 8)),
      madeUpRun({ purpose: "verification", temperaturesC: [10, 40], loads: [0, 12] }, [
        ...cells.slice(8, 11),
        idealCell("ODD", { gainTc: -3e-4 }),
      ]),
    ];
    const result = derive({ family, method: "pooled-gain", order: 1, runs, exclude: [] });
    expect(found(result)).toEqual([]);
  });

  it("leaves a difference below 0.1 v alone, and tells one above", () => {
    // Effect of gainTc at 40 °C: 20 K × 3000 v × difference.
    const with_ = (difference: number) =>
      found(
        deriveOf(
          Array.from({ length: 12 }, (_, i) => idealCell(`E${i}`, i === 0 ? { gainTc: -4e-4 + difference } : {})),
        ),
      );
    const gainTc = (findings: Finding[]) => findings.filter((one) => one.data?.coefficient === "gainTc");
    expect(gainTc(with_(0.99 * (0.1 / 60_000)))).toEqual([]);
    expect(gainTc(with_(1.01 * (0.1 / 60_000)))).toHaveLength(1);
  });

  it("leaves out the excluded", () => {
    const cells = lotOf(40, (i) => (i === 7 ? { zero: 0.2 } : {}));
    const runs = [madeUpRun({ purpose: "sample", temperaturesC: [10, 40], loads: [0, 12] }, cells)];
    const exclude = [{ serial: "D0007", reason: "bent" }];
    expect(found(derive({ family, method: "individual", order: 1, runs, exclude }))).toEqual([]);
  });

  it("becomes one finding of the lot beyond twenty devices", () => {
    const mixed = (many: number) => found(deriveOf(lotOf(200, (i) => (i < many ? { gain: 1.1 } : {}))));
    expect(mixed(20)).toHaveLength(20);
    const findings = mixed(21);
    expect(findings).toMatchObject([
      { code: "coefficient.many_outliers", severity: "soft", serial: null, data: { coefficient: "gain", devices: 21 } },
    ]);
    expect(findings[0]?.data?.serials).toHaveLength(20);
  });
});

describe("coefficient.sign_unlike", () => {
  const signs = (...gainTcs: number[]) =>
    found(deriveOf(gainTcs.map((gainTc, i) => idealCell(`E${i}`, { gainTc })))).filter(
      (one) => one.code === "coefficient.sign_unlike",
    );

  it("is found where one device has the other sign than nine in ten of the others", () => {
    const findings = signs(4e-4, -4e-4, -4.1e-4, -4.2e-4, -4.1e-4, -4e-4);
    expect(findings).toMatchObject([{ severity: "soft", serial: "E0", data: { alike: 5, others: 5 } }]);
  });

  it("is not found in a lot of either sign, with fewer than four others, or in a value too small to matter", () => {
    expect(signs(4e-4, 4e-4, -4.1e-4, -4.2e-4, -4.1e-4, -4e-4)).toEqual([]);
    expect(signs(4e-4, -4e-4, -4.1e-4, -4.2e-4)).toEqual([]);
    expect(signs(4e-4, -4e-4, -4.1e-4, -4.2e-4, -4.2e-4)).toHaveLength(1);
    expect(signs(1e-6, -4e-4, -4.1e-4, -4.2e-4, -4.1e-4, -4e-4)).toEqual([]);
  });

  it("does not look at zeroTc, which has either sign in any lot", () => {
    const cells = Array.from({ length: 30 }, (_, i) => idealCell(`E${i}`, { zeroTc: i === 0 ? -2e-5 : 2e-5 }));
    expect(found(deriveOf(cells)).filter((one) => one.code === "coefficient.sign_unlike")).toEqual([]);
  });
});

describe("thermometer.off_siblings", () => {
  it("tells how many kelvin, where, and what it would be in intervals were it another device's", () => {
    const findings = found(deriveOf(lotOf(60, (i) => (i === 9 ? { tempOffset: -210 } : {}))));
    expect(findings).toMatchObject([{ code: "thermometer.off_siblings", severity: "soft", serial: "D0009" }]);
    const { awayK, intervals } = (findings[0]?.data ?? {}) as { awayK: number; intervals: number };
    expect(Math.abs(awayK)).toBeGreaterThan(15);
    // At least 3000 v × 4.1e-4 1/K for each kelvin.
    expect(intervals / Math.abs(awayK)).toBeGreaterThan(1.2);
  });

  it("finds a slope as well as an offset, once a device", () => {
    const findings = found(deriveOf(lotOf(60, (i) => (i === 9 ? { tempSlope: 0.14, tempOffset: -260 } : {}))));
    expect(findings.map((one) => [one.code, one.serial])).toEqual([["thermometer.off_siblings", "D0009"]]);
    expect(findings[0]?.data).toMatchObject({ fromC: 10, atC: 40 });
    expect(findings[0]?.message).toMatch(/^From 10 to 40 °C/);
  });

  it("leaves the tolerance of parts alone", () => {
    expect(found(deriveOf(lotOf(60, (i) => (i === 9 ? { tempOffset: -227 } : {}))))).toEqual([]);
  });
});

describe("device.in_two_runs", () => {
  const cells = lotOf(6);
  const sample = madeUpRun({ purpose: "sample", temperaturesC: [10, 40], loads: [0, 12] }, cells);
  const also = (purpose: "zero" | "verification" | "span", count: number) => {
    const other = madeUpRun({ purpose, temperaturesC: [10, 40], loads: [0] }, cells.slice(0, count));
    const result = derive({ family, method: "individual", order: 1, runs: [sample, other], exclude: [] });
    return result.findings.filter((one) => one.code === "device.in_two_runs");
  };

  it("notes whose readings are not used, gathered", () => {
    expect(also("zero", 2)).toMatchObject([
      { severity: "note", serial: null, data: { used: "sample", other: "zero", devices: 2 } },
    ]);
    expect(also("zero", 1)).toMatchObject([{ serial: "D0000" }]);
  });

  it("does not note what a span run is for, nor a sample device in the verification run, which has a note of its own", () => {
    expect(also("span", 2)).toEqual([]);
    expect(also("verification", 2)).toEqual([]);
  });
});
