import { describe, expect, it } from "vitest";
import { normalCdf, studentQuantile } from "@/lib/domain/compensation/distributions";
import { type Fit, fitLine, fitQuadratic } from "@/lib/domain/compensation/fit";
import { findGrubbsStatistic, grubbsCritical } from "@/lib/domain/compensation/grubbs";
import { poolGain } from "@/lib/domain/compensation/pooled";
import { predictFit } from "@/lib/domain/compensation/predict-fit";
import { chanceInside, shareInside } from "@/lib/domain/compensation/sample-plan";
import { meanOf, standardDeviationOf } from "@/lib/domain/compensation/sample-statistics";
import { shareShown, shareShownWithFailures } from "@/lib/domain/compensation/share-shown";
import { oneSidedFactor, toleranceFactor } from "@/lib/domain/compensation/tolerance";
import { drawValues, expectAtLeast, expectShare, normalSource, shareOf } from "@/tests/support/normal-source";
import { readFamily } from "@/tests/unit/compensation/golden-example";

/**
 * Monte Carlo with a fixed seed: intervals are drawn over and over from a population that is known, and have to cover
 * what they claim to cover as often as they claim. No table is needed: the claim itself is the check.
 */
const SEED = "5f3759df2545f4914f6cdd1d9e3779b9";
const TRIALS = 20_000;

/** Mean and deviation of a sample. */
function summary(values: readonly number[]): { mean: number; sd: number } {
  return { mean: meanOf(values) as number, sd: standardDeviationOf(values) as number };
}

describe("confidence intervals of a mean", () => {
  it.each([
    [2, 0.95],
    [5, 0.95],
    [10, 0.9],
    [30, 0.99],
  ])("of %i values cover it at %d", (n, confidence) => {
    const normal = normalSource(SEED);
    const t = studentQuantile((1 + confidence) / 2, n - 1);
    const covered = shareOf(TRIALS, () => {
      const { mean, sd } = summary(drawValues(normal, n, 418, 3));
      return Math.abs(mean - 418) <= (t * sd) / Math.sqrt(n);
    });
    expectShare(covered, confidence, TRIALS);
  });

  it("cover the lot's gainTc as the pooled result states them", () => {
    const normal = normalSource(SEED);
    const family = { ...readFamily("family.json"), confidence: 0.9 };
    const [trueGainTc, trials] = [-418e-6, 100];
    const covered = shareOf(trials, () => {
      const trims = drawValues(normal, 6, trueGainTc, 3e-6).map((gainTc) => ({ gain: 1, gainTc }));
      const [low = 0, high = 0] = poolGain(trims, 1, family)?.confidenceInterval ?? [];
      return low <= trueGainTc && trueGainTc <= high;
    });
    expectShare(covered, 0.9, trials);
  });
});

describe("confidence intervals of fits", () => {
  const temperatures = [-10, -10, 5, 20, 20, 33, 40];
  const truth = [0.012, -3e-4, 2e-6];
  const at = 28;
  const exact = (x: number, order: number) => truth.slice(0, order + 1).reduce((sum, b, i) => sum + b * x ** i, 0);
  const noise = 1e-3;

  function draw(normal: () => number, order: 1 | 2): Fit {
    const signals = temperatures.map((x) => exact(x, order) + noise * normal());
    return order === 1 ? fitLine(temperatures, signals) : fitQuadratic(temperatures, signals);
  }

  it.each([1, 2] as const)("cover each coefficient of order %i at 95 %", (order) => {
    const t = studentQuantile(0.975, temperatures.length - order - 1);
    for (let i = 0; i <= order; i++) {
      const normal = normalSource(SEED);
      const covered = shareOf(TRIALS / 2, () => {
        const { coefficients, standardErrors } = draw(normal, order);
        return Math.abs((coefficients[i] as number) - (truth[i] as number)) <= t * (standardErrors?.[i] as number);
      });
      expectShare(covered, 0.95, TRIALS / 2);
    }
  });

  it.each([1, 2] as const)(
    "cover the curve of order %i between its points, and a new value there, at 95 %",
    (order) => {
      const t = studentQuantile(0.975, temperatures.length - order - 1);
      const normal = normalSource(SEED);
      let news = 0;
      const covered = shareOf(TRIALS / 2, () => {
        const { value, standardError, newStandardError } = predictFit(draw(normal, order), at);
        const fresh = exact(at, order) + noise * normal();
        if (Math.abs(value - fresh) <= t * (newStandardError as number)) news++;
        return Math.abs(value - exact(at, order)) <= t * (standardError as number);
      });
      expectShare(covered, 0.95, TRIALS / 2);
      expectShare(news / (TRIALS / 2), 0.95, TRIALS / 2);
    },
  );
});

describe("tolerance intervals", () => {
  it.each([
    [5, 0.95, 0.95],
    [10, 0.95, 0.95],
    [10, 0.99, 0.9],
    [40, 0.9, 0.99],
  ])("of %i values hold %d of the population at %d", (n, coverage, confidence) => {
    const normal = normalSource(SEED);
    const k = toleranceFactor({ n, coverage, confidence });
    const held = shareOf(TRIALS / 2, () => {
      const { mean, sd } = summary(drawValues(normal, n));
      return normalCdf(mean + k * sd) - normalCdf(mean - k * sd) >= coverage;
    });
    expectShare(held, confidence, TRIALS / 2);
  });

  it.each([
    [5, 0.95, 0.95],
    [10, 0.99, 0.9],
    [40, 0.9, 0.99],
  ])("on one side of %i values hold %d of the population at %d", (n, coverage, confidence) => {
    const normal = normalSource(SEED);
    const k = oneSidedFactor({ n, coverage, confidence });
    const held = shareOf(TRIALS / 2, () => {
      const { mean, sd } = summary(drawValues(normal, n));
      return normalCdf(mean + k * sd) >= coverage;
    });
    expectShare(held, confidence, TRIALS / 2);
  });

  it.each([1, 3])("bound the share within ±%d deviations from below at 95 %", (limit) => {
    const normal = normalSource(SEED);
    const trials = 300;
    const bounded = shareOf(trials, () => {
      const { mean, sd } = summary(drawValues(normal, 6));
      const { lowerBound } = shareInside({ n: 6, sd, limit, confidence: 0.95 });
      return normalCdf(mean + limit) - normalCdf(mean - limit) >= lowerBound;
    });
    expectShare(bounded, 0.95, trials);
  });

  it("come out inside the limit as often as the plan says", () => {
    const question = { sd: 1, limit: 3.65, coverage: 0.95, confidence: 0.95 };
    for (const n of [9, 15]) {
      const normal = normalSource(SEED);
      const k = toleranceFactor({ n, ...question });
      const inside = shareOf(TRIALS, () => k * summary(drawValues(normal, n)).sd <= question.limit);
      expectShare(inside, chanceInside(n, question), TRIALS);
    }
  });
});

describe("the outlier test", () => {
  /** The level is an upper bound by Bonferroni's inequality, and exact for samples as small as these. */
  it.each([3, 5, 10])("accuses one sample of %i in twenty that has no outlier", (n) => {
    for (const [side, sides] of [
      ["both", 2],
      ["high", 1],
    ] as const) {
      const normal = normalSource(SEED);
      const critical = grubbsCritical(n, 0.05, sides);
      const accused = shareOf(TRIALS, () => (findGrubbsStatistic(drawValues(normal, n), side)?.g ?? 0) > critical);
      expectShare(accused, 0.05, TRIALS);
    }
  });
});

describe("the share shown by verification devices", () => {
  const bound = (passed: number, count: number) => shareShownWithFailures(passed, count, 0.95);

  it("is wrong for 5 of 5 as often as admitted, in the worst lot there can be", () => {
    const normal = normalSource(SEED);
    const share = shareShown(5, 0.95);
    // In a lot of exactly the share shown (or a hair less) all five pass one time in twenty.
    const lucky = shareOf(TRIALS, () => drawValues(normal, 5).every((value) => normalCdf(value) < share));
    expectShare(lucky, 0.05, TRIALS);
  });

  it.each([
    [5, 0.7],
    [10, 0.9],
    [20, 0.95],
    [59, 0.97],
  ])("of %i devices from a lot with a share of %d is at most that share, 19 times in 20", (count, share) => {
    const normal = normalSource(SEED);
    const bounds = Array.from({ length: count + 1 }, (_, passed) => bound(passed, count));
    const kept = shareOf(TRIALS / 4, () => {
      const passed = drawValues(normal, count).filter((value) => normalCdf(value) < share).length;
      return (bounds[passed] as number) <= share;
    });
    // Counts are whole: the bound keeps its promise with something to spare.
    expectAtLeast(kept, 0.95, TRIALS / 4);
  });

  it("rises with every device that passes", () => {
    for (let passed = 1; passed <= 20; passed++) expect(bound(passed, 20)).toBeGreaterThan(bound(passed - 1, 20));
    expect(bound(20, 20)).toBe(shareShown(20, 0.95));
  });
});
