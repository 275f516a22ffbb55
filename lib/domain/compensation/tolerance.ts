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

/** Half width r of the interval about `offset` that holds the share `coverage` of a standard normal population. */
function halfWidth(offset: number, coverage: number): number {
  const z = normalQuantile((1 + coverage) / 2);
  return findRoot((r) => normalCdf(offset + r) - normalCdf(offset - r) - coverage, z * 0.999999, z * 1.000001 + offset);
}

/**
 * Exact two-sided tolerance factor k for a normal population of unknown mean and deviation: mean ± k·s holds at
 * least the share `coverage` with the confidence asked. The probability is integrated numerically over the error of
 * the mean; with n → ∞ it goes to the normal quantile.
 * Source: Odeh and Owen, Tables for Normal Tolerance Limits (1980), the definition as in ISO 16269-6 (from memory).
 * @throws AppError `tolerance.invalid` {n, coverage, confidence}.
 */
export function toleranceFactor(question: ToleranceQuestion): number {
  assertQuestion(question);
  const { n, coverage, confidence } = question;
  const df = n - 1;
  // The error of the mean in units of its own deviation: beyond 9 nothing is left to double precision.
  const nodes = panelNodes(0, 9, 8).map(({ x, weight }) => ({
    weight: 2 * weight * normalDensity(x),
    square: df * halfWidth(x / Math.sqrt(n), coverage) ** 2,
  }));
  const reached = (k: number) =>
    nodes.reduce((sum, node) => sum + node.weight * chiSquareUpper(node.square / (k * k), df), 0);
  let low = normalQuantile((1 + coverage) / 2) / 4;
  while (reached(low) > confidence) low /= 2;
  let high = 2 * howeFactor(question);
  while (reached(high) < confidence) high *= 2;
  return findRoot((k) => reached(k) - confidence, low, high);
}

/**
 * Howe's approximation of the two-sided factor, k = z·√(ν(1 + 1/n)/χ²).
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
 * Exact one-sided factor: t'/√n, t' the quantile of the noncentral t distribution with n − 1 degrees of freedom and
 * noncentrality z·√n. Source: NIST/SEMATECH e-Handbook, 7.2.6.3.
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
