import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { poolGain } from "@/lib/domain/compensation/pooled";
import {
  chanceInside,
  findSampleSize,
  planSample,
  SAMPLE_MIN,
  SAMPLE_PLAN_MAX,
  shareInside,
} from "@/lib/domain/compensation/sample-plan";
import { standardDeviationOf } from "@/lib/domain/compensation/sample-statistics";
import { toleranceFactor } from "@/lib/domain/compensation/tolerance";
import { readFamily } from "./golden-example";

const at95 = { coverage: 0.95, confidence: 0.95 };
const limit = 7.3e-6;
/** Properties cost an integration each: a few dozen cases a rule. */
const few = { numRuns: 25 };
const share = fc.double({ min: 0.5, max: 0.999, noNaN: true });
/** Deviation as a share of the limit. */
const part = fc.double({ min: 0.01, max: 1.2, noNaN: true });

describe("least sample", () => {
  it("finds by the published factors where k·s first fits", () => {
    // k at 95/95: 3.3934 for 10, 3.5459 for 9 (tests/fixtures/published/normal-tolerance-k.csv).
    expect(findSampleSize({ sd: limit / 3.3935, limit, ...at95 })).toBe(10);
    expect(findSampleSize({ sd: limit / 3.3933, limit, ...at95 })).toBe(11);
    expect(findSampleSize({ sd: limit / 3.547, limit, ...at95 })).toBe(9);
  });

  it("never plans fewer than five", () => {
    expect(findSampleSize({ sd: 0, limit, ...at95 })).toBe(SAMPLE_MIN);
    expect(findSampleSize({ sd: limit / 5.08, limit, ...at95 })).toBe(5);
  });

  it("is the first whose exact interval fits, for any question", () => {
    fc.assert(
      fc.property(part, share, share, (ratio, coverage, confidence) => {
        const question = { sd: ratio * limit, limit, coverage, confidence };
        const n = findSampleSize(question);
        const fits = (count: number) => toleranceFactor({ n: count, coverage, confidence }) * ratio <= 1 + 1e-9;
        const misses = (count: number) => toleranceFactor({ n: count, coverage, confidence }) * ratio > 1 - 1e-9;
        if (n === null) expect(misses(SAMPLE_PLAN_MAX)).toBe(true);
        else {
          expect(fits(n)).toBe(true);
          if (n > SAMPLE_MIN) expect(misses(n - 1)).toBe(true);
        }
      }),
      few,
    );
  });

  it("grows with deviation, coverage and confidence", () => {
    const size = (ratio: number, coverage: number, confidence: number) =>
      findSampleSize({ sd: ratio * limit, limit, coverage, confidence }) ?? SAMPLE_PLAN_MAX + 1;
    fc.assert(
      fc.property(part, share, share, share, (ratio, coverage, confidence, other) => {
        const n = size(ratio, coverage, confidence);
        expect(size(ratio * 1.1, coverage, confidence)).toBeGreaterThanOrEqual(n);
        expect(size(ratio, Math.max(coverage, other), confidence)).toBeGreaterThanOrEqual(n);
        expect(size(ratio, coverage, Math.max(confidence, other))).toBeGreaterThanOrEqual(n);
      }),
      few,
    );
  });

  it.each([
    { sd: -1 },
    { sd: Number.NaN },
    { sd: Number.POSITIVE_INFINITY },
    { limit: 0 },
    { coverage: 1 },
    { confidence: 0 },
  ])("refuses %j", (wrong) => {
    const question = { sd: 1e-6, limit, ...at95, ...wrong };
    expect(() => planSample(question)).toThrow(expect.objectContaining({ code: "plan.invalid" }));
  });
});

describe("plan of a sample", () => {
  it("says what a sample of that size is good for", () => {
    const plan = planSample({ sd: 2e-6, limit, ...at95 });
    expect(plan).toMatchObject({ outcome: "reachable", n: 9, nLikely: 15 });
    expect(plan.halfWidth).toBeCloseTo(3.5459e-6 * 2, 9);
    expect(plan.words).toBe(
      "Plan for at least 9 sample devices: if their standard deviation is 2.00 ppm/K, 95 % of the lot lie within " +
        "±7.30 ppm/K of the mean at 95 % confidence. A sample's own deviation is left to chance: with 9 devices the " +
        "chance of coming out inside is 61 %, with 15 it is 90 %.",
    );
  });

  it("says when no sample helps, because the lot itself spreads too much", () => {
    const plan = planSample({ sd: 4e-6, limit, ...at95 });
    expect(plan).toMatchObject({ outcome: "spread-too-large", n: null, toleranceFactor: null, nLikely: null });
    expect(plan.words).toContain("95 % of the lot spread over ±7.84 ppm/K, and the limit is ±7.30 ppm/K");
  });

  it("says when it would take more than anybody trims as a sample", () => {
    const plan = planSample({ sd: 3.7e-6, limit, ...at95 });
    expect(plan).toMatchObject({ outcome: "beyond-bound", n: null });
    expect(plan.words).toContain("More than 1000 sample devices");
    expect(planSample({ sd: 3.5e-6, limit, ...at95 })).toMatchObject({ n: 393, nLikely: null });
  });

  it("gives a chance that grows with the sample", () => {
    const chances = [9, 15, 30, 60].map((n) => chanceInside(n, { sd: 2e-6, limit, ...at95 }));
    expect([...chances].sort((a, b) => a - b)).toEqual(chances);
    expect(chanceInside(9, { sd: 0, limit, ...at95 })).toBe(1);
  });
});

describe("share of the lot inside the limit", () => {
  it("gives the coverage back whose factor the limit is", () => {
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 60 }), share, share, (n, coverage, confidence) => {
        const k = toleranceFactor({ n, coverage, confidence });
        expect(shareInside({ n, sd: 1e-6, limit: k * 1e-6, confidence }).lowerBound).toBeCloseTo(coverage, 9);
      }),
      few,
    );
  });

  it("grows with the limit, shrinks with the confidence, and stays below the estimate", () => {
    const ratios = fc.double({ min: 0.05, max: 20, noNaN: true });
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 60 }), ratios, share, (n, ratio, confidence) => {
        const { lowerBound, estimate } = shareInside({ n, sd: 1, limit: ratio, confidence });
        expect(lowerBound).toBeGreaterThanOrEqual(0);
        expect(lowerBound).toBeLessThan(1);
        expect(shareInside({ n, sd: 1, limit: ratio * 1.1, confidence }).lowerBound).toBeGreaterThanOrEqual(lowerBound);
        expect(
          shareInside({ n, sd: 1, limit: ratio, confidence: (confidence + 1) / 2 }).lowerBound,
        ).toBeLessThanOrEqual(lowerBound + 1e-12);
        if (confidence > 0.8) expect(lowerBound).toBeLessThanOrEqual(estimate);
      }),
      few,
    );
  });

  it("does not go astray where nothing scatters or everything does", () => {
    expect(shareInside({ n: 5, sd: 0, limit: 1, confidence: 0.95 })).toEqual({ lowerBound: 1 - 1e-9, estimate: 1 });
    const hopeless = shareInside({ n: 5, sd: 1e300, limit: 1e-9, confidence: 0.95 });
    expect(hopeless.lowerBound).toBe(0);
    expect(hopeless.estimate).toBeLessThan(1e-12);
  });
});

describe("pooled result", () => {
  const family = readFamily("family.json");
  const trims = (values: number[]) => values.map((gainTc) => ({ gain: 1, gainTc }));

  it("says which share is expected inside and how large the sample would have to be", () => {
    const values = [-417e-6, -419e-6, -418.2e-6, -418.8e-6, -417.6e-6, -418.1e-6];
    const pooled = poolGain(trims(values), 1, family);
    const sd = standardDeviationOf(values) as number;
    const { coverage, confidence } = family;
    const question = { sd, limit: pooled?.limit as number, coverage, confidence };
    expect(pooled?.sampleNeeded).toBe(findSampleSize(question));
    const inside = shareInside({ ...question, n: 6 });
    expect(pooled).toMatchObject({ shareExpected: inside.lowerBound, shareEstimate: inside.estimate });
    expect((pooled?.shareExpected as number) >= coverage).toBe(pooled?.verdict === "inside");
  });

  it("says nothing from one device", () => {
    expect(poolGain(trims([-418e-6]), 1, family)).toMatchObject({
      verdict: "not-judged",
      shareExpected: null,
      shareEstimate: null,
      sampleNeeded: null,
    });
  });
});
