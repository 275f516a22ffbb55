import { describe, expect, it } from "vitest";
import { findGrubbsStatistic, grubbsCritical, grubbsPower } from "@/lib/domain/compensation/grubbs";

describe("Grubbs' statistic", () => {
  const values = [1, 2, 3, 4, 9];

  it("looks where it is told to", () => {
    expect(findGrubbsStatistic(values)?.index).toBe(4);
    expect(findGrubbsStatistic(values, "high")).toEqual(findGrubbsStatistic(values));
    expect(findGrubbsStatistic(values, "low")?.index).toBe(0);
    expect(findGrubbsStatistic(values, "low")?.g).toBeCloseTo(2.8 / Math.sqrt(9.7), 12);
    const mirrored = values.map((value) => -value);
    expect(findGrubbsStatistic(mirrored, "low")).toEqual(findGrubbsStatistic(values, "high"));
  });

  it("has nothing to say on two values or on equal ones", () => {
    expect(findGrubbsStatistic([1, 9])).toBeUndefined();
    expect(findGrubbsStatistic([2, 2, 2, 2])).toBeUndefined();
  });
});

describe("what the test is worth", () => {
  it("can never pass (n − 1)/√n, however far the value is out", () => {
    for (const n of [3, 5, 10, 30]) {
      const values = [...Array.from({ length: n - 1 }, () => 0), 1e9];
      expect(findGrubbsStatistic(values)?.g).toBeCloseTo(grubbsPower(n, 0.05).greatest, 12);
      expect(grubbsPower(n, 0.05).critical).toBeLessThan(grubbsPower(n, 0.05).greatest);
    }
  });

  it("names the distance at which a value just counts", () => {
    for (const [n, sides] of [
      [3, 2],
      [5, 2],
      [8, 1],
      [10, 2],
    ] as const) {
      const { reach, critical } = grubbsPower(n, 0.05, sides);
      // n − 1 values with mean 0 and standard deviation 1, and one at the distance.
      const others = Array.from({ length: n - 1 }, (_, i) => i - (n - 2) / 2);
      const s = Math.sqrt(others.reduce((sum, value) => sum + value * value, 0) / (n - 2));
      const values = [...others.map((value) => value / s), reach];
      expect(findGrubbsStatistic(values, sides === 2 ? "both" : "high")?.g).toBeCloseTo(critical, 9);
    }
  });

  it("calls itself nearly powerless on three values, weak on few, and blind for two of a kind", () => {
    expect(grubbsPower(3, 0.05).words).toBe(
      "On 3 values the test is nearly powerless: G can never exceed 1.1547, its critical value is 1.1543, and a value " +
        "counts as an outlier only when it is more than 46.8 standard deviations of the others from their mean. That " +
        "none is found says nothing.",
    );
    expect(grubbsPower(5, 0.05).words).toContain("On 5 values the test is weak: a value counts as an outlier only");
    expect(grubbsPower(10, 0.05).words).toContain("more than 4.0 standard deviations");
    expect(grubbsPower(10, 0.05).words).toContain("two on one side can hide each other");
    // And so they do: two values far out, none found.
    expect(findGrubbsStatistic([1, 2, 3, 4, 5, 6, 60, 61])?.g).toBeLessThan(grubbsCritical(8, 0.05));
  });

  it.each([
    [2, 0.05],
    [2.5, 0.05],
    [5, 0],
    [5, 1],
    [Number.NaN, 0.05],
  ])("refuses n %d at %d", (n, alpha) => {
    expect(() => grubbsPower(n, alpha)).toThrow(expect.objectContaining({ code: "grubbs.invalid" }));
  });
});
