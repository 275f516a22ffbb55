import { describe, expect, it } from "vitest";
import {
  chiSquareCdf,
  chiSquareQuantile,
  noncentralTCdf,
  normalCdf,
  normalQuantile,
  studentCdf,
  studentQuantile,
} from "@/lib/domain/compensation/distributions";
import { findGrubbsStatistic, grubbsCritical } from "@/lib/domain/compensation/grubbs";
import { devicesToShow, shareShown } from "@/lib/domain/compensation/share-shown";
import { howeFactor, oneSidedFactor, toleranceFactor } from "@/lib/domain/compensation/tolerance";
import { readPublished } from "./published-tables";

/** The tables print fixed decimals: equal when no further off than half a unit of the last one (and a little). */
function printed(actual: number, table: number, decimals: number): void {
  expect(Math.abs(actual - table)).toBeLessThan(0.51 * 10 ** -decimals);
}

describe("distributions against tables", () => {
  it("holds the t and chi-square table (computed with SciPy, 6 decimals)", () => {
    const { rows } = readPublished("t-chi2.csv");
    expect(rows.length).toBeGreaterThan(30);
    for (const row of rows) {
      const df = row.df as number;
      for (const [name, two] of [
        ["t90", 0.9],
        ["t95", 0.95],
        ["t95_45", 0.9545],
        ["t99", 0.99],
        ["t99_73", 0.9973],
      ] as const)
        printed(studentQuantile((1 + two) / 2, df), row[name] as number, 6);
      for (const p of ["0_025", "0_05", "0_95", "0_975"])
        printed(chiSquareQuantile(Number(p.replace("_", ".")), df), row[`chi2_${p}`] as number, 6);
    }
  });

  it("holds the normal quantiles of NIST e-Handbook 1.3.6.7.1 (printed values from memory)", () => {
    printed(normalQuantile(0.95), 1.6449, 4);
    printed(normalQuantile(0.975), 1.96, 4);
    printed(normalQuantile(0.995), 2.5758, 4);
    printed(normalCdf(1), 0.84134, 5);
    printed(normalCdf(-3), 0.00135, 5);
  });

  it("returns from every quantile to the probability", () => {
    for (const p of [1e-6, 0.01, 0.3, 0.5, 0.8, 0.999]) {
      expect(normalCdf(normalQuantile(p))).toBeCloseTo(p, 13);
      for (const df of [1, 2, 7, 40, 500]) {
        expect(studentCdf(studentQuantile(p, df), df)).toBeCloseTo(p, 12);
        expect(chiSquareCdf(chiSquareQuantile(p, df), df)).toBeCloseTo(p, 12);
      }
    }
  });

  it("gives the central t distribution for no noncentrality", () => {
    for (const df of [2, 4, 9, 60])
      for (const t of [-2, 0.3, 1.7]) expect(noncentralTCdf(t, df, 0)).toBeCloseTo(studentCdf(t, df), 9);
  });
});

describe("tolerance factors", () => {
  it("holds the table of exact and approximate factors", () => {
    const { rows } = readPublished("normal-tolerance-k.csv");
    expect(rows.length).toBeGreaterThan(150);
    for (const row of rows) {
      const question = { n: row.n as number, coverage: row.P as number, confidence: row.C as number };
      printed(toleranceFactor(question), row.k2_exact as number, 4);
      printed(howeFactor(question), row.k2_howe as number, 4);
      printed(oneSidedFactor(question), row.k1_exact as number, 4);
    }
  });

  it("holds the worked example of NIST e-Handbook 7.2.6.3: 43 values, 90 % at 99 %", () => {
    const question = { n: 43, coverage: 0.9, confidence: 0.99 };
    printed(chiSquareQuantile(0.01, 42), 23.650095, 6);
    printed(howeFactor(question), 2.2173, 4);
    printed(toleranceFactor(question), 2.2228, 4);
    printed(oneSidedFactor(question), 1.874, 4);
    printed(97.07 - howeFactor(question) * 0.0268, 97.0106, 4);
    printed(97.07 + howeFactor(question) * 0.0268, 97.1294, 4);
  });

  it("goes to the normal quantile for many values", () => {
    expect(toleranceFactor({ n: 1_000_000, coverage: 0.95, confidence: 0.95 })).toBeCloseTo(1.96, 2);
  });
});

describe("outliers", () => {
  it("holds the worked example of NIST e-Handbook 1.3.5.17.1", () => {
    const values = [199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57];
    const found = findGrubbsStatistic(values);
    expect(found?.index).toBe(7);
    expect(found?.g).toBeCloseTo(2.46876461, 8);
    expect(grubbsCritical(8, 0.05, 1)).toBeCloseTo(2.031652, 6);
    expect(grubbsCritical(8, 0.05, 2)).toBeCloseTo(2.1266451, 7);
  });

  it("holds the table of critical values", () => {
    const { rows } = readPublished("grubbs-critical.csv");
    expect(rows.length).toBeGreaterThan(30);
    for (const row of rows) {
      const n = row.n as number;
      printed(grubbsCritical(n, 0.05, 1), row.one_sided_5pct as number, 6);
      printed(grubbsCritical(n, 0.025, 1), row.one_sided_2_5pct as number, 6);
      printed(grubbsCritical(n, 0.01, 1), row.one_sided_1pct as number, 6);
      printed(grubbsCritical(n, 0.05, 2), row.two_sided_5pct as number, 6);
      printed(grubbsCritical(n, 0.01, 2), row.two_sided_1pct as number, 6);
    }
  });
});

describe("share shown by passing devices", () => {
  /** Exact binomial reasoning, as the zero-failure plans of acceptance sampling; 59 for 95/95 from memory. */
  it("shows 54.9 % with 5 of 5 at 95 %, and asks 59 devices for 95 % at 95 %", () => {
    expect(shareShown(5, 0.95)).toBeCloseTo(0.5493, 4);
    expect(devicesToShow(0.95, 0.95)).toBe(59);
    expect(devicesToShow(0.9, 0.9)).toBe(22);
  });
});
