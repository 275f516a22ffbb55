import { AppError } from "@/lib/errors";
import { chiSquareQuantile, noncentralTCdf, normalCdf, normalDensity, normalQuantile } from "./distributions";
import { panelNodes } from "./integrate";
import { findRoot } from "./root";
import { incompleteGamma, logGamma } from "./special-functions";

/** How much is to lie inside, with what confidence, known from how many values. */
export interface ToleranceQuestion {
  /** Number of values n, 2 … 1e9. */
  n: number;
  /** Share of the population, 1e-9 … 1 − 1e-9. */
  coverage: number;
  /** 1e-9 … 1 − 1e-9 */
  confidence: number;
}

/** Shares closer to 0 or 1 than this are not told apart. */
const SHARE_END = 1e-9;
const MOST_VALUES = 1e9;

function assertQuestion({ n, coverage, confidence }: ToleranceQuestion): void {
  const open = (p: number) => p >= SHARE_END && p <= 1 - SHARE_END;
  if (!(Number.isInteger(n) && n >= 2 && n <= MOST_VALUES && open(coverage) && open(confidence)))
    throw new AppError("tolerance.invalid", { n, coverage, confidence });
}

/** The error of a mean in units of its own deviation: beyond 9 nothing is left to double precision. */
const MEAN_NODES = panelNodes(0, 9, 4)
  .map(({ x, weight }) => ({ x, weight: 2 * weight * normalDensity(x) }))
  .sort((a, b) => a.x - b.x);

/**
 * Half width r of the interval about `offset` that leaves the share `outside` of a standard normal population out, by
 * Newton's method on the logarithm of that share.
 * @param near a half width of a smaller offset: the start. @param z the half width about 0.
 */
function halfWidth(offset: number, outside: number, near: number, z: number): number {
  const left = (r: number) => normalCdf(offset - r) + normalCdf(-offset - r);
  let r = near;
  for (let step = 0; step < 20; step++) {
    const tails = left(r);
    const slope = normalDensity(offset - r) + normalDensity(offset + r);
    const move = (tails / slope) * Math.log(tails / outside);
    if (!Number.isFinite(move)) break;
    r = Math.max(0, r + move);
    if (Math.abs(move) <= 2e-15 * r) return r;
  }
  // Shares next to 0 leave the method no digits to converge in.
  return findRoot((r) => left(r) - outside, z * 0.999999, z * 1.000001 + offset);
}

/** Relative precision of factors and shares: that of the integration. */
const PRECISION = 1e-13;

/** z such that ±z holds all but the share `outside` of a standard normal population. */
function quantileOutside(outside: number): number {
  return -normalQuantile(outside / 2);
}

/**
 * For a sample of n: the confidence with which mean ± k·s leaves at most the share `outside` of the population out, as
 * a function of k. What does not depend on k is computed once.
 */
function confidenceByFactor(n: number, outside: number): (k: number) => number {
  const half = (n - 1) / 2;
  const logGammaHalf = logGamma(half);
  const z = quantileOutside(outside);
  let near = z;
  const nodes = MEAN_NODES.map(({ x, weight }) => {
    near = halfWidth(x / Math.sqrt(n), outside, near, z);
    return { weight, square: near ** 2 };
  });
  // P(s ≤ r/k) the other way round: the upper tail of χ² = (n − 1)·s² at (n − 1)·(r/k)².
  return (k) =>
    nodes.reduce(
      (sum, { weight, square }) => sum + weight * incompleteGamma(half, (half * square) / (k * k), logGammaHalf).upper,
      0,
    );
}

/**
 * Exact two-sided tolerance factor k for a normal population of unknown mean and deviation: mean ± k·s holds at
 * least the share `coverage` with the confidence asked. The probability is integrated numerically over the error of
 * the mean (Gauss–Legendre); with n → ∞ it goes to the normal quantile.
 * Source: Odeh and Owen, Tables for Normal Tolerance Limits (1980), the definition as in ISO 16269-6 (from memory).
 * @throws AppError `tolerance.invalid` {n, coverage, confidence}.
 */
export function toleranceFactor(question: ToleranceQuestion): number {
  assertQuestion(question);
  const { n, coverage, confidence } = question;
  const reached = confidenceByFactor(n, 1 - coverage);
  const guess = howeFactor(question);
  let low = guess * 0.95;
  while (reached(low) > confidence) low *= 0.8;
  let high = guess * 1.05;
  while (reached(high) < confidence) high *= 1.25;
  return findRoot((k) => reached(k) - confidence, low, high, PRECISION);
}

/**
 * The confidence with which mean ± k·s of n values holds at least the share `coverage`: {@link toleranceFactor} read
 * backwards, in one integration. It rises with k.
 * @param k ≥ 0; 0 holds nothing.
 * @throws AppError `tolerance.invalid`.
 */
export function toleranceConfidence({ n, coverage, k }: { n: number; coverage: number; k: number }): number {
  assertQuestion({ n, coverage, confidence: 0.5 });
  if (!(k >= 0)) throw new AppError("tolerance.invalid", { k });
  return k === 0 ? 0 : Math.min(1, confidenceByFactor(n, 1 - coverage)(k));
}

/**
 * The largest share that mean ± k·s of n values holds with the confidence asked: {@link toleranceFactor} solved for the
 * coverage, by the same integration. It rises with k and n.
 * @param k ≥ 0, may be infinite.
 * @returns 0 below 1e-9, at most 1 − 1e-9.
 * @throws AppError `tolerance.invalid`.
 */
export function toleranceCoverage({ n, k, confidence }: { n: number; k: number; confidence: number }): number {
  assertQuestion({ n, coverage: 0.5, confidence });
  if (!(k >= 0)) throw new AppError("tolerance.invalid", { k });
  if (k === 0) return 0;
  if (k === Number.POSITIVE_INFINITY) return 1 - SHARE_END;
  const over = (z: number) => confidenceByFactor(n, 2 * normalCdf(-z))(k) - confidence;
  const [least, most] = [quantileOutside(1 - SHARE_END), quantileOutside(SHARE_END)];
  const clip = (z: number) => Math.min(most, Math.max(least, z));
  // Howe's approximation is off by a few per cent at most: a narrow bracket, widened where it misses.
  const guess = k * Math.sqrt(chiSquareQuantile(1 - confidence, n - 1) / ((n - 1) * (1 + 1 / n)));
  let [low, high] = [clip(guess * 0.95), clip(guess * 1.05)];
  while (low > least && over(low) < 0) low = clip(low * 0.8);
  while (high < most && over(high) > 0) high = clip(high * 1.25);
  if (low === least && over(low) < 0) return 0;
  if (high === most && over(high) >= 0) return 1 - SHARE_END;
  return 1 - 2 * normalCdf(-findRoot(over, low, high, PRECISION));
}

/**
 * Howe's approximation of the two-sided factor, k = z·√(ν(1 + 1/n)/χ²): a start for the exact one.
 * Source: NIST/SEMATECH e-Handbook of Statistical Methods, 7.2.6.3.
 * @throws AppError `tolerance.invalid`.
 */
export function howeFactor(question: ToleranceQuestion): number {
  assertQuestion(question);
  const { n, coverage, confidence } = question;
  const z = normalQuantile((1 + coverage) / 2);
  return z * Math.sqrt(((n - 1) * (1 + 1 / n)) / chiSquareQuantile(1 - confidence, n - 1));
}

/**
 * Exact one-sided factor k: with the confidence asked at least the share `coverage` lies below mean + k·s (or above
 * mean − k·s). k = t'/√n, t' the quantile of the noncentral t distribution with n − 1 degrees of freedom and
 * noncentrality z·√n, its probability integrated numerically. Source: NIST/SEMATECH e-Handbook, 7.2.6.3.
 * @throws AppError `tolerance.invalid`.
 */
export function oneSidedFactor(question: ToleranceQuestion): number {
  assertQuestion(question);
  const { n, coverage, confidence } = question;
  const root = Math.sqrt(n);
  const delta = normalQuantile(coverage) * root;
  const reached = (k: number) => noncentralTCdf(k * root, n - 1, delta);
  let high = 2 * Math.abs(howeFactor(question)) + 1;
  while (reached(high) < confidence) high *= 2;
  let low = -1;
  while (reached(low) > confidence) low *= 2;
  return findRoot((k) => reached(k) - confidence, low, high);
}
