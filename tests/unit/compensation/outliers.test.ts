import { describe, expect, it } from "vitest";
import { grubbsPower } from "@/lib/domain/compensation/grubbs";
import { findOutliers, medianOf, modifiedScoreLimit } from "@/lib/domain/compensation/outliers";
import { seededNormal } from "./made-up-run";

const levels = { robust: 0.01, grubbs: 0.01 };

describe("outliers by the median and by Grubbs", () => {
  it("takes the median of an odd and of an even number", () => {
    expect(medianOf([3, 1, 2])).toBe(2);
    expect(medianOf([4, 1, 3, 2])).toBe(2.5);
  });

  it("scores by 0.6745·(x − median)/MAD (NIST/SEMATECH e-Handbook 1.3.5.17)", () => {
    const values = [1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15, 16, 17, 18, 19, 100];
    // Median 10.5, absolute deviations 0.5 … 9.5, twice each but 89.5: MAD 5.
    const { median, outliers } = findOutliers(values, levels);
    expect(median).toBe(10.5);
    expect(outliers).toHaveLength(1);
    expect(outliers[0]?.index).toBe(19);
    expect(outliers[0]?.score).toBeCloseTo((0.67449 * 89.5) / 5, 3);
    expect(outliers[0]?.g).toBeGreaterThan(outliers[0]?.critical ?? 9);
  });

  it("finds two that hide each other from Grubbs", () => {
    const values = [10, 10.1, 9.9, 10.05, 9.95, 10.02, 9.98, 10.03, 9.97, 10.01, 15, 15.1];
    const { outliers } = findOutliers(values, levels);
    expect(outliers.map((one) => [one.index, one.g])).toEqual([
      [10, null],
      [11, null],
    ]);
  });

  it("keeps Grubbs for small samples, where the median is known too badly, with what the test is worth", () => {
    const sample = (last: number) =>
      findOutliers([-417, -419, -418.2, -418.8, -417.6, last], { robust: 0.01, grubbs: 0.05 });
    const { critical, words } = grubbsPower(6, 0.05);
    expect(sample(-390).outliers).toMatchObject([{ index: 5, critical, caveat: words }]);
    expect(sample(-418).outliers).toEqual([]);
    const { outliers } = findOutliers([10, 10.1, 9.9, 10.05, 11], { robust: 0.01, grubbs: 0.05 });
    expect(outliers).toMatchObject([{ index: 4, score: null, caveat: expect.stringContaining("On 5 values") }]);
  });

  it("has nothing to say on equal, on two and on no values, and tells one from many equal ones", () => {
    expect(findOutliers([], levels)).toEqual({ median: 0, outliers: [] });
    expect(findOutliers([1, 2], levels).outliers).toEqual([]);
    expect(findOutliers([5, 5, 5, 5, 5, 5], levels).outliers).toEqual([]);
    const most = [...Array.from({ length: 40 }, () => 5), 5.1];
    expect(findOutliers(most, levels).outliers.map((one) => one.index)).toEqual([40]);
  });

  it("does not count a value at the limit", () => {
    const values = Array.from({ length: 101 }, (_, i) => i - 50);
    const limit = modifiedScoreLimit(102, 0.01);
    // The median of 102 values with one far above is 0.5, the median deviation 25.5.
    const at = (score: number) => 0.5 + (score * 25.5) / 0.6744897501960817;
    const found = (score: number) =>
      findOutliers([...values, at(score)], { robust: 0.01, grubbs: 1e-9 }).outliers.length;
    expect(found(limit * (1 - 1e-9))).toBe(0);
    expect(found(limit * (1 + 1e-9))).toBe(1);
  });

  it.each([6, 10, 28, 200])("finds something in no more than one clean normal sample of %s in a hundred", (n) => {
    const normal = seededNormal(1000 + n);
    const trials = 2000;
    let found = 0;
    for (let i = 0; i < trials; i++) {
      const values = Array.from({ length: n }, () => normal());
      if (findOutliers(values, { robust: 0.01, grubbs: 1e-12 }).outliers.length > 0) found++;
    }
    // 1 % of 2000 is 20, with a standard deviation of 4.4.
    expect(found).toBeLessThanOrEqual(20 + 3 * 4.4);
  });
});
