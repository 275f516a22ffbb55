import { formatQuantityWithUnit } from "@/lib/domain/format/quantity";
import { AppError } from "@/lib/errors";
import { chiSquareCdf, normalCdf, normalQuantile } from "./distributions";
import { toleranceConfidence, toleranceCoverage, toleranceFactor } from "./tolerance";

/** Fewer sample devices than this can't stand for a lot. */
export const SAMPLE_MIN = 5;

/** Plans end here: who needs more sample devices than this trims them individually. */
export const SAMPLE_PLAN_MAX = 1000;

/** The chance of a verdict inside that a careful plan asks for (common practice, no source). */
const LIKELY = 0.9;

/** What a sample has to show: the tolerance interval mean ± k·s within mean ± limit. */
export interface SampleQuestion {
  /** Standard deviation of gainTc from device to device, 1/K, ≥ 0: expected, or found in a sample. */
  sd: number;
  /** Pooling limit, 1/K, > 0. */
  limit: number;
  /** Share of the lot to be inside, 0…1. */
  coverage: number;
  /** 0…1 */
  confidence: number;
}

/**
 * reachable; spread-too-large: no sample size helps, since the share asked does not lie inside the limit even where
 * the lot is known exactly; beyond-bound: it would take more than {@link SAMPLE_PLAN_MAX} devices.
 */
export type SampleOutcome = "reachable" | "spread-too-large" | "beyond-bound";

export interface SamplePlan {
  outcome: SampleOutcome;
  /** Least number of sample devices, at least 5; null unless reachable. */
  n: number | null;
  /** Exact two-sided factor k(n). */
  toleranceFactor: number | null;
  /** k(n)·sd, 1/K: at most the limit. */
  halfWidth: number | null;
  /** Chance that a sample of n comes out inside, were sd the lot's true deviation: a sample's own scatters about it. */
  chanceInside: number | null;
  /** Least number of devices that come out inside with a chance of 90 %; null beyond the bound. */
  nLikely: number | null;
  /** The plan as people read it. */
  words: string;
}

function assertQuestion({ sd, limit, coverage, confidence }: SampleQuestion): void {
  const open = (p: number) => p > 0 && p < 1;
  const finite = Number.isFinite(sd) && Number.isFinite(limit);
  if (!(finite && sd >= 0 && limit > 0 && open(coverage) && open(confidence)))
    throw new AppError("plan.invalid", { sd, limit, coverage, confidence });
}

/** Least whole number in [low, high] that holds, of a condition that goes on holding once it does; null for none. */
function findLeast(low: number, high: number, holds: (n: number) => boolean): number | null {
  if (holds(low)) return low;
  if (!holds(high)) return null;
  let [fails, works] = [low, high];
  while (works - fails > 1) {
    const middle = Math.floor((fails + works) / 2);
    if (holds(middle)) works = middle;
    else fails = middle;
  }
  return works;
}

/** Whether k(n)·sd ≤ limit, asked the other way round so that it takes one integration and no search for k. */
function isEnough(n: number, { sd, limit, coverage, confidence }: SampleQuestion): boolean {
  return sd === 0 || toleranceConfidence({ n, coverage, k: limit / sd }) >= confidence;
}

/**
 * Least number of sample devices n ≥ 5 whose exact two-sided tolerance interval mean ± k(n)·sd lies within the limit.
 * It falls with the limit and rises with sd, coverage and confidence.
 * @returns null where none up to {@link SAMPLE_PLAN_MAX} does.
 * @throws AppError `plan.invalid` {sd, limit, coverage, confidence}.
 */
export function findSampleSize(question: SampleQuestion): number | null {
  assertQuestion(question);
  return findLeast(SAMPLE_MIN, SAMPLE_PLAN_MAX, (n) => isEnough(n, question));
}

/**
 * Chance that a sample of n devices of a normal lot with the true deviation sd comes out with k(n)·s ≤ limit: from the
 * chi-square distribution of (n − 1)·s²/sd².
 * @throws AppError `plan.invalid`, `tolerance.invalid`.
 */
export function chanceInside(n: number, question: SampleQuestion): number {
  assertQuestion(question);
  const { sd, limit, coverage, confidence } = question;
  if (sd === 0) return 1;
  const largest = limit / toleranceFactor({ n, coverage, confidence });
  return chiSquareCdf((n - 1) * (largest / sd) ** 2, n - 1);
}

/** A share as asked for, with the decimals it has: 95 %, 99.99 %. */
function percent(share: number): string {
  return `${Number((share * 100).toPrecision(6))} %`;
}

function perKelvin(value: number): string {
  return formatQuantityWithUnit("gainTc", value);
}

function refusal(outcome: SampleOutcome, { sd, limit, coverage, confidence }: SampleQuestion): string {
  const way = "Trim individually, or find out why gainTc spreads so much.";
  if (outcome === "beyond-bound")
    return (
      `More than ${SAMPLE_PLAN_MAX} sample devices would be needed to show ${percent(coverage)} of the lot within ` +
      `±${perKelvin(limit)} at ${percent(confidence)} confidence. ${way}`
    );
  const half = normalQuantile((1 + coverage) / 2) * sd;
  return (
    `No number of sample devices is enough: with a standard deviation of ${perKelvin(sd)}, ${percent(coverage)} of the ` +
    `lot spread over ±${perKelvin(half)}, and the limit is ±${perKelvin(limit)}. ${way}`
  );
}

function advice(n: number, chance: number, nLikely: number | null, question: SampleQuestion): string {
  const { sd, limit, coverage, confidence } = question;
  // Cut, not rounded: a chance must not look better than it is.
  const own = `with ${n} devices the chance of coming out inside is ${Math.floor(chance * 100)} %`;
  const likely =
    nLikely === n
      ? ""
      : nLikely === null
        ? `, and no sample of up to ${SAMPLE_PLAN_MAX} brings it to ${percent(LIKELY)}`
        : `, with ${nLikely} it is ${percent(LIKELY)}`;
  return (
    `Plan for at least ${n} sample devices: if their standard deviation is ${perKelvin(sd)}, ${percent(coverage)} of the ` +
    `lot lie within ±${perKelvin(limit)} of the mean at ${percent(confidence)} confidence. A sample's own deviation is ` +
    `left to chance: ${own}${likely}.`
  );
}

/**
 * How many sample devices a lot takes, with what a sample of that size is good for.
 * @throws AppError `plan.invalid` {sd, limit, coverage, confidence}.
 */
export function planSample(question: SampleQuestion): SamplePlan {
  const n = findSampleSize(question);
  const { sd, limit, coverage, confidence } = question;
  if (n === null) {
    const outcome = normalQuantile((1 + coverage) / 2) * sd >= limit ? "spread-too-large" : "beyond-bound";
    const none = { toleranceFactor: null, halfWidth: null, chanceInside: null, nLikely: null };
    return { outcome, n, ...none, words: refusal(outcome, question) };
  }
  const k = toleranceFactor({ n, coverage, confidence });
  const chance = chanceInside(n, question);
  const nLikely = findLeast(n, SAMPLE_PLAN_MAX, (more) => chanceInside(more, question) >= LIKELY);
  const words = advice(n, chance, nLikely, question);
  return { outcome: "reachable", n, toleranceFactor: k, halfWidth: k * sd, chanceInside: chance, nLikely, words };
}

/** What a sample says about how much of the lot lies inside the limit. */
export interface ShareInside {
  /** At least this share, at the confidence: the largest coverage p with k(n, p)·sd ≤ limit, at most 1 − 1e-9. */
  lowerBound: number;
  /** The share were mean and sd the lot's own: no confidence is attached to it. */
  estimate: number;
}

/**
 * Share of a normal lot whose gainTc lies within limit of the sample's mean.
 * @param sample n ≥ 2 devices with the standard deviation sd, 1/K.
 * @throws AppError `plan.invalid`, `tolerance.invalid`.
 */
export function shareInside(sample: { n: number; sd: number; limit: number; confidence: number }): ShareInside {
  const { n, sd, limit, confidence } = sample;
  assertQuestion({ sd, limit, confidence, coverage: 0.5 });
  const k = sd === 0 ? Number.POSITIVE_INFINITY : limit / sd;
  return { lowerBound: toleranceCoverage({ n, k, confidence }), estimate: 1 - 2 * normalCdf(-k) };
}
