import { describe, expect, it } from "vitest";
import { fitLine, fitQuadratic } from "@/lib/domain/compensation/fit";
import { meanOf, standardDeviationOf } from "@/lib/domain/compensation/sample-statistics";
import { agreeingDigits, column, readPublished } from "./published-tables";

/** Source of all certified values: NIST Statistical Reference Datasets (StRD), as noted in each file's head. */
describe("fits against the certified values of NIST StRD", () => {
  it("holds Norris, a line over 36 calibration points, to 9 digits", () => {
    const table = readPublished("strd-norris.csv");
    const fit = fitLine(column(table, "x"), column(table, "y"));
    const [b0, b1] = fit.coefficients as [number, number];
    const [se0, se1] = fit.standardErrors as [number, number];
    expect(table.rows).toHaveLength(36);
    expect(fit.degreesOfFreedom).toBe(34);
    for (const [actual, certified] of [
      [b0, -0.262323073774029],
      [b1, 1.00211681802045],
      [se0, 0.232818234301152],
      [se1, 0.429796848199937e-3],
      [fit.residualSd as number, 0.884796396144373],
      [fit.rSquared as number, 0.999993745883712],
    ] as const)
      expect(agreeingDigits(actual, certified)).toBeGreaterThan(9);
  });

  it("holds Pontius, the parabola of a load-cell calibration, to 9 digits and its errors to 8", () => {
    const table = readPublished("strd-pontius.csv");
    const fit = fitQuadratic(column(table, "x"), column(table, "y"));
    expect(table.rows).toHaveLength(40);
    const certified = [0.673565789473684e-3, 0.732059160401003e-6, -0.316081871345029e-14];
    const errors = [0.107938612033077e-3, 0.157817399981659e-9, 0.486652849992036e-16];
    certified.forEach((value, i) => {
      expect(agreeingDigits(fit.coefficients[i] as number, value)).toBeGreaterThan(9);
      expect(agreeingDigits(fit.standardErrors?.[i] as number, errors[i] as number)).toBeGreaterThan(8);
    });
    expect(agreeingDigits(fit.residualSd as number, 0.205177424076185e-3)).toBeGreaterThan(8);
    expect(agreeingDigits(fit.rSquared as number, 0.999999900178537)).toBeGreaterThan(12);
  });

  it("gives Pontius a covariance that its standard errors are the roots of", () => {
    const table = readPublished("strd-pontius.csv");
    const fit = fitQuadratic(column(table, "x"), column(table, "y"));
    fit.covariance?.forEach((row, i) => {
      expect(Math.sqrt(row[i] as number)).toBeCloseTo(fit.standardErrors?.[i] as number, 12);
      row.forEach((value, k) => {
        expect(value).toBe(fit.covariance?.[k]?.[i]);
      });
    });
  });
});

/** Lag-1 autocorrelation: shows that the values stand in the certified order, which mean and deviation do not. */
function lag1(values: readonly number[]): number {
  const mean = meanOf(values) as number;
  const centred = values.map((value) => value - mean);
  const products = centred.slice(1).reduce((sum, value, i) => sum + value * (centred[i] as number), 0);
  return products / centred.reduce((sum, value) => sum + value * value, 0);
}

describe("mean and deviation against the certified values of NIST StRD", () => {
  it.each([
    ["strd-michelso.csv", 100, 299.8524, 0.0790105478190518, 0.535199668621283, 11],
    ["strd-mavro.csv", 50, 2.001856, 0.000429123454003053, 0.937989183438248, 11],
    ["strd-numacc1.csv", 3, 10000002, 1, -0.5, 15],
    ["strd-numacc2.csv", 1001, 1.2, 0.1, -0.999, 13],
    // The digits of these two cannot be held in doubles: 1000000.1 has an error of 1e-10 of its own.
    ["strd-numacc3.csv", 1001, 1000000.2, 0.1, -0.999, 8],
    ["strd-numacc4.csv", 1001, 10000000.2, 0.1, -0.999, 7],
  ] as const)("holds %s", (name, n, mean, sd, autocorrelation, digits) => {
    const values = column(readPublished(name), "y");
    expect(values).toHaveLength(n);
    expect(agreeingDigits(meanOf(values) as number, mean)).toBeGreaterThan(14);
    expect(agreeingDigits(standardDeviationOf(values) as number, sd)).toBeGreaterThan(digits);
    expect(agreeingDigits(lag1(values), autocorrelation)).toBeGreaterThan(Math.min(digits, 10));
  });
});
