import { AppError } from "@/lib/errors";
import {
  chiSquareQuantile,
  chiSquareUpper,
  noncentralTCdf,
  normalCdf,
  normalDensity,
  normalQuantile,
} from "./distributions";
import { panelNodes } from "./integrate";
import { findRoot } from "./root";

/** How much is to lie inside, with what confidence, known from how many values. */
export interface ToleranceQuestion {
  /** Number of values n ≥ 2. */
  n: number;
  /** Share of the population, 0…1. */
  coverage: number;
  /** 0…1 */
  confidence: number;
}

function assertQuestion({ n, coverage, confidence }: ToleranceQuestion): void {
  const open = (p: number) => p > 0 && p < 1;
  if (!(Number.isInteger(n) && n >= 2 && open(coverage) && open(confidence)))
    throw new AppError("tolerance.invalid", { n, coverage, confidence });
}

/** The error of a mean in units of its own deviation: beyond 9 nothing is left to double precision. */
const MEAN_NODES = panelNodes(0, 9, 8)
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

/** z such that ±z holds all but the share `outside` of a standard normal population. */
function quantileOutside(outside: number): number {
  return -normalQuantile(outside / 2);
}

/**
 * For a sample of n: the confidence with which mean ± k·s leaves at most the share `outside` of the population out, as
 * a function of k. What does not depend on k is computed once.
 */
function confidenceByFactor(n: number, outside: number): (k: number) => number {
  const df = n - 1;
  const z = quantileOutside(outside);
  let near = z;
  const nodes = MEAN_NODES.map(({ x, weight }) => {
    near = halfWidth(x / Math.sqrt(n), outside, near, z);
    return { weight, square: df * near ** 2 };
  });
  return (k) => nodes.reduce((sum, node) => sum + node.weight * chiSquareUpper(node.square / (k * k), df), 0);
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
  let low = normalQuantile((1 + coverage) / 2) / 4;
  while (reached(low) > confidence) low /= 2;
  let high = 2 * howeFactor(question);
  while (reached(high) < confidence) high *= 2;
  return findRoot((k) => reached(k) - confidence, low, high);
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

/** Shares closer to 0 or 1 than this are not told apart. */
const SHARE_END = 1e-9;

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
  const over = (outside: number) => confidenceByFactor(n, outside)(k) - confidence;
  if (k === 0 || over(1 - SHARE_END) < 0) return 0;
  if (k === Number.POSITIVE_INFINITY || over(SHARE_END) >= 0) return 1 - SHARE_END;
  // In z the confidence turns smoothly, where in the share itself it is a cliff at either end.
  const z = findRoot((z) => over(2 * normalCdf(-z)), quantileOutside(1 - SHARE_END), quantileOutside(SHARE_END));
  return 1 - 2 * normalCdf(-z);
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
