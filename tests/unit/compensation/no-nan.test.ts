import fc from "fast-check";
import { describe, expect, it } from "vitest";
import * as distributions from "@/lib/domain/compensation/distributions";
import { zeroShiftRatio } from "@/lib/domain/compensation/envelope";
import { fitLine, fitQuadratic } from "@/lib/domain/compensation/fit";
import { findGrubbsStatistic, grubbsPower } from "@/lib/domain/compensation/grubbs";
import { predictFit } from "@/lib/domain/compensation/predict-fit";
import { findRoot } from "@/lib/domain/compensation/root";
import { meanOf, spreadOf, standardDeviationOf } from "@/lib/domain/compensation/sample-statistics";
import { devicesToShow, shareShown, shareShownWithFailures } from "@/lib/domain/compensation/share-shown";
import { howeFactor, toleranceConfidence, toleranceCoverage } from "@/lib/domain/compensation/tolerance";
import { AppError } from "@/lib/errors";
import { readFamily } from "./golden-example";

/** Any double: NaN, infinities, the tiniest and the largest among them, and small counts and shares more often. */
const any = fc.oneof(
  fc.double(),
  fc.double({ min: -50, max: 50 }),
  fc.double({ min: 0, max: 1 }),
  fc.integer({ min: 0, max: 40 }),
);
const list = fc.array(any, { maxLength: 8 });

function holdsNaN(value: unknown): boolean {
  if (typeof value === "number") return Number.isNaN(value);
  return value !== null && typeof value === "object" && Object.values(value).some(holdsNaN);
}

/** A refusal by name is an answer; NaN, or an error that nobody thought of, is none. */
function answers(compute: () => unknown): void {
  try {
    expect(holdsNaN(compute())).toBe(false);
  } catch (error) {
    if (!(error instanceof AppError)) throw error;
  }
}

const family = readFamily("family.json");

describe("whatever goes in, no NaN comes out", () => {
  it.each<[string, (a: number, b: number, c: number) => unknown]>([
    ["normalDensity", distributions.normalDensity],
    ["normalCdf", distributions.normalCdf],
    ["normalQuantile", distributions.normalQuantile],
    ["chiSquareCdf", distributions.chiSquareCdf],
    ["chiSquareUpper", distributions.chiSquareUpper],
    ["chiSquareQuantile", distributions.chiSquareQuantile],
    ["studentCdf", distributions.studentCdf],
    ["studentQuantile", distributions.studentQuantile],
    ["betaCdf", distributions.betaCdf],
    ["noncentralTCdf", distributions.noncentralTCdf],
    ["howeFactor", (n, coverage, confidence) => howeFactor({ n, coverage, confidence })],
    ["grubbsPower", (n, alpha) => grubbsPower(n, alpha)],
    ["shareShown", shareShown],
    ["shareShownWithFailures", shareShownWithFailures],
    ["devicesToShow", devicesToShow],
    ["zeroShiftRatio", (change, kelvin) => zeroShiftRatio(change, kelvin, family)],
    ["findRoot", (a, b, c) => findRoot((x) => x - c, a, b)],
  ])("%s", (_, compute) => {
    fc.assert(fc.property(any, any, any, (a, b, c) => answers(() => compute(a, b, c))));
  });

  it.each<[string, (n: number, share: number, k: number) => unknown]>([
    ["toleranceConfidence", (n, coverage, k) => toleranceConfidence({ n, coverage, k })],
    ["toleranceCoverage", (n, confidence, k) => toleranceCoverage({ n, confidence, k })],
  ])("%s", (_, compute) => {
    const count = fc.oneof(fc.integer({ min: 2, max: 40 }), any);
    fc.assert(
      fc.property(count, fc.double({ min: 0, max: 1 }), any, (n, share, k) => answers(() => compute(n, share, k))),
      { numRuns: 50 },
    );
  });

  it.each<[string, (x: number[], y: number[], at: number) => unknown]>([
    ["meanOf", meanOf],
    ["standardDeviationOf", standardDeviationOf],
    ["spreadOf", spreadOf],
    ["findGrubbsStatistic", (values) => findGrubbsStatistic(values)],
    ["fitLine", (x, y, at) => [fitLine(x, y), predictFit(fitLine(x, y), at)]],
    ["fitQuadratic", (x, y, at) => [fitQuadratic(x, y), predictFit(fitQuadratic(x, y), at)]],
  ])("%s", (_, compute) => {
    fc.assert(fc.property(list, list, any, (x, y, at) => answers(() => compute(x, y.slice(0, x.length), at))));
  });
});
