import { describe, expect, it } from "vitest";
import {
  betaCdf,
  chiSquareCdf,
  chiSquareQuantile,
  noncentralTCdf,
  normalCdf,
  normalQuantile,
  studentCdf,
  studentQuantile,
} from "@/lib/domain/compensation/distributions";
import { findGrubbsStatistic, grubbsCritical, grubbsPower } from "@/lib/domain/compensation/grubbs";
import { devicesToShow, shareShown, shareShownWithFailures } from "@/lib/domain/compensation/share-shown";
import { incompleteGamma } from "@/lib/domain/compensation/special-functions";
import {
  howeFactor,
  oneSidedFactor,
  toleranceConfidence,
  toleranceCoverage,
  toleranceFactor,
} from "@/lib/domain/compensation/tolerance";
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

  it("holds the interval of a standard deviation, √(ν/χ²), of the same table", () => {
    for (const row of readPublished("t-chi2.csv").rows) {
      const df = row.df as number;
      printed(Math.sqrt(df / chiSquareQuantile(0.975, df)), row.sd_ci95_lower_factor as number, 6);
      printed(Math.sqrt(df / chiSquareQuantile(0.025, df)), row.sd_ci95_upper_factor as number, 6);
    }
  });

  it("holds t for k = 2 of GUM (JCGM 100:2008) table G.2, from memory", () => {
    printed(studentQuantile(0.97725, 5), 2.65, 2);
    printed(studentQuantile(0.97725, 9), 2.32, 2);
  });

  /** Abramowitz and Stegun 26.5.27 and 26.5.24: t and the binomial are incomplete beta functions. */
  it("holds the beta distribution to those that it is made of", () => {
    for (const [t, df] of [
      [0.7, 3],
      [2.2622, 9],
      [5, 40],
    ] as const)
      expect(betaCdf(df / (df + t * t), df / 2, 0.5)).toBeCloseTo(2 * studentCdf(-t, df), 13);
    const [n, p] = [7, 0.3];
    const choose = [1, 7, 21, 35, 35, 21, 7, 1];
    let atLeast = 0;
    for (let k = n; k >= 1; k--) {
      atLeast += (choose[k] as number) * p ** k * (1 - p) ** (n - k);
      expect(betaCdf(p, k, n - k + 1)).toBeCloseTo(atLeast, 13);
    }
  });

  /** Two ways of our own that share nothing: rational approximations, and the incomplete gamma function. */
  it("takes the normal distribution from the error function as from χ² with one degree", () => {
    for (let z = -30; z <= 8; z += 0.37) {
      const { lower, upper } = incompleteGamma(0.5, 0.5 * z * z);
      const other = z < 0 ? 0.5 * upper : 0.5 + 0.5 * lower;
      expect(Math.abs(normalCdf(z) / other - 1)).toBeLessThan(1e-12);
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
    // The page's approximation on one side, as a comparison: k = (z_p + √(z_p² − a·b))/a. Ours above is exact.
    const [zp, zc] = [normalQuantile(0.9), normalQuantile(0.99)];
    const a = 1 - zc ** 2 / (2 * 42);
    const b = zp ** 2 - zc ** 2 / 43;
    printed(a, 0.9355727, 6);
    printed(b, 1.5165164, 6);
    const approximate = (zp + Math.sqrt(zp ** 2 - a * b)) / a;
    printed(approximate, 1.8752, 4);
    printed(97.07 + approximate * 0.0268, 97.1203, 4);
    printed(97.07 - approximate * 0.0268, 97.0197, 4);
  });

  it("answers the questions asked the other way round", () => {
    for (const row of readPublished("normal-tolerance-k.csv").rows.slice(0, 60)) {
      const [n, coverage, confidence] = [row.n as number, row.P as number, row.C as number];
      const k = toleranceFactor({ n, coverage, confidence });
      expect(toleranceConfidence({ n, coverage, k })).toBeCloseTo(confidence, 10);
      expect(toleranceCoverage({ n, k, confidence })).toBeCloseTo(coverage, 10);
    }
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

  it("has no room on three values: G ends at 1.1547, the critical value lies at 1.1543", () => {
    const { greatest, critical } = grubbsPower(3, 0.05);
    printed(greatest, 1.1547, 4);
    printed(critical, 1.1543, 4);
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

  it("gives back for every count the share that it shows", () => {
    for (let count = 1; count <= 300; count++) expect(devicesToShow(shareShown(count, 0.95), 0.95)).toBe(count);
  });

  /** Clopper and Pearson's bound, by its definition: that many or more pass with a probability of 1 − confidence. */
  it("bounds a share with failures by the exact binomial sum", () => {
    const choose = (n: number, k: number): number => (k === 0 ? 1 : (choose(n - 1, k - 1) * n) / k);
    for (const [passed, count] of [
      [4, 5],
      [9, 10],
      [18, 20],
      [55, 60],
    ] as const) {
      const p = shareShownWithFailures(passed, count, 0.95);
      let atLeast = 0;
      for (let k = passed; k <= count; k++) atLeast += choose(count, k) * p ** k * (1 - p) ** (count - k);
      expect(atLeast).toBeCloseTo(0.05, 12);
    }
    expect(shareShownWithFailures(0, 5, 0.95)).toBe(0);
    expect(() => shareShownWithFailures(6, 5, 0.95)).toThrow(expect.objectContaining({ code: "share.invalid" }));
  });
});
