import { studentQuantile } from "./distributions";
import { poolingLimit } from "./envelope";
import { findSampleSize, shareInside } from "./sample-plan";
import { standardDeviationOf } from "./sample-statistics";
import { toleranceFactor } from "./tolerance";
import type { FamilyRules, GainCoefficients, PooledResult } from "./types";

export { SAMPLE_MIN } from "./sample-plan";

/** Sum over count: these means are stored in images, whose bytes have to be those of any program that takes a mean. */
function plainMean(values: readonly number[]): number {
  let sum = 0;
  for (const value of values) sum += value;
  return sum / values.length;
}

/**
 * The lot's gainTc from the sample's individual trims: plain means, an exact two-sided normal tolerance interval
 * mean ± k·s and a confidence interval of the mean. Inside when k·s is at most the pooling limit; and what the sample
 * says of the share inside it, and of the size it would have to have.
 * @returns null for an empty sample; intervals and verdict need two devices.
 */
export function poolGain(trims: readonly GainCoefficients[], order: 1 | 2, family: FamilyRules): PooledResult | null {
  const slopes = trims.map((trim) => trim.gainTc);
  const gains = trims.map((trim) => trim.gain);
  if (trims.length === 0) return null;
  const gainTc = plainMean(slopes);
  const meanGain = plainMean(gains);
  const { coverage, confidence } = family;
  const n = trims.length;
  const sd = standardDeviationOf(slopes);
  const limit = poolingLimit(family);
  const pooled: PooledResult = {
    gainTc,
    ...(order === 2 && { gainTc2: plainMean(trims.map((trim) => trim.gainTc2 ?? 0)) }),
    sd,
    n,
    meanGain,
    sdGain: standardDeviationOf(gains),
    confidenceInterval: null,
    toleranceInterval: null,
    toleranceFactor: null,
    coverage,
    confidence,
    limit,
    verdict: "not-judged",
    shareExpected: null,
    shareEstimate: null,
    sampleNeeded: null,
  };
  if (sd === null) return pooled;
  const ofMean = (studentQuantile((1 + confidence) / 2, n - 1) * sd) / Math.sqrt(n);
  const k = toleranceFactor({ n, coverage, confidence });
  pooled.confidenceInterval = [gainTc - ofMean, gainTc + ofMean];
  pooled.toleranceInterval = [gainTc - k * sd, gainTc + k * sd];
  pooled.toleranceFactor = k;
  pooled.verdict = k * sd <= limit ? "inside" : "outside";
  const share = shareInside({ n, sd, limit, confidence });
  pooled.shareExpected = share.lowerBound;
  pooled.shareEstimate = share.estimate;
  pooled.sampleNeeded = findSampleSize({ sd, limit, coverage, confidence });
  return pooled;
}
