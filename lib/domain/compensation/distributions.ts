import { AppError } from "@/lib/errors";
import { complementaryError } from "./error-function";
import { panelNodes } from "./integrate";
import { findRoot } from "./root";
import { incompleteBeta, incompleteGamma, logGamma } from "./special-functions";

function assertProbability(p: number): void {
  if (!(p > 0 && p < 1)) throw new AppError("probability.out_of_range", { value: p });
}

/** Beyond these the sums and fractions run out of steps or of doubles. */
const FREEDOM = [1e-6, 1e9] as const;

function assertFreedom(df: number): void {
  if (!(df >= FREEDOM[0] && df <= FREEDOM[1])) throw new AppError("freedom.out_of_range", { value: df });
}

/** Infinite arguments have a meaning for a distribution, NaN has none and must not travel on. */
function assertNumber(x: number): void {
  if (Number.isNaN(x)) throw new AppError("argument.not_a_number");
}

/** Density of the standard normal distribution. @throws AppError `argument.not_a_number`. */
export function normalDensity(z: number): number {
  assertNumber(z);
  return Math.exp(-0.5 * z * z) / Math.sqrt(2 * Math.PI);
}

/**
 * P(Z ≤ z) of the standard normal distribution; the far lower tail keeps its relative precision down to 1e-308.
 * @throws AppError `argument.not_a_number`.
 */
export function normalCdf(z: number): number {
  assertNumber(z);
  return 0.5 * complementaryError(-z * Math.SQRT1_2);
}

/**
 * z with P(Z ≤ z) = p.
 * @throws AppError `probability.out_of_range` unless 0 < p < 1.
 */
export function normalQuantile(p: number): number {
  assertProbability(p);
  if (p === 0.5) return 0;
  if (p > 0.5) return -normalQuantile(1 - p);
  return findRoot((z) => Math.log(normalCdf(z)) - Math.log(p), -37.5, 0);
}

/**
 * P(X ≤ x) of the chi-square distribution.
 * @throws AppError `freedom.out_of_range` unless df is 1e-6 … 1e9; `argument.not_a_number`.
 */
export function chiSquareCdf(x: number, df: number): number {
  assertNumber(x);
  assertFreedom(df);
  return incompleteGamma(df / 2, x / 2).lower;
}

/** P(X > x) of the chi-square distribution. @throws as {@link chiSquareCdf} */
export function chiSquareUpper(x: number, df: number): number {
  assertNumber(x);
  assertFreedom(df);
  return incompleteGamma(df / 2, x / 2).upper;
}

/** Searched on logarithms of value and probability: both may be tiny and still be meant. */
const LOG_LEAST = -700;

/**
 * x with P(X ≤ x) = p for the chi-square distribution.
 * @throws AppError `probability.out_of_range` or `freedom.out_of_range`; `root.not_bracketed` where x is below 1e-304.
 */
export function chiSquareQuantile(p: number, df: number): number {
  assertProbability(p);
  assertFreedom(df);
  const [tail, share] = p > 0.5 ? [chiSquareUpper, 1 - p] : [chiSquareCdf, p];
  const off = (log: number) => Math.log(tail(Math.exp(log), df) || Number.MIN_VALUE) - Math.log(share);
  let high = Math.log(df + 10);
  while (chiSquareCdf(Math.exp(high), df) < p) high += 0.5;
  return Math.exp(findRoot(off, LOG_LEAST, high));
}

/**
 * P(T ≤ t) of Student's distribution.
 * @throws AppError `freedom.out_of_range` unless df is 1e-6 … 1e9; `argument.not_a_number`.
 */
export function studentCdf(t: number, df: number): number {
  assertNumber(t);
  assertFreedom(df);
  const square = t * t;
  // Beyond what a square can hold the tail is nothing.
  if (square === Number.POSITIVE_INFINITY) return t < 0 ? 0 : 1;
  const tail = 0.5 * incompleteBeta(df / (df + square), square / (df + square), df / 2, 0.5);
  return t < 0 ? tail : 1 - tail;
}

/**
 * t with P(T ≤ t) = p for Student's distribution.
 * @throws AppError `probability.out_of_range` or `freedom.out_of_range`; `root.not_bracketed` where |t| passes 1e152.
 */
export function studentQuantile(p: number, df: number): number {
  assertProbability(p);
  assertFreedom(df);
  if (p === 0.5) return 0;
  if (p > 0.5) return -studentQuantile(1 - p, df);
  return -Math.exp(findRoot((log) => Math.log(studentCdf(-Math.exp(log), df)) - Math.log(p), -45, 350));
}

/**
 * P(X ≤ x) of the beta distribution.
 * @param x any number but NaN. @param a, b 1e-6 … 1e9.
 * @throws AppError `freedom.out_of_range` unless a and b are; `argument.not_a_number`.
 */
export function betaCdf(x: number, a: number, b: number): number {
  assertNumber(x);
  assertFreedom(a);
  assertFreedom(b);
  const inside = Math.min(1, Math.max(0, x));
  return incompleteBeta(inside, 1 - inside, a, b);
}

/**
 * P(T ≤ t) of the noncentral t distribution, by integrating P(Z ≤ t·r − delta) over the density of r = √(χ²/df).
 * @param t, delta finite.
 * @throws AppError `freedom.out_of_range` unless df is 1e-6 … 1e9; `argument.not_a_number` where t or delta is not finite.
 */
export function noncentralTCdf(t: number, df: number, delta: number): number {
  assertFreedom(df);
  if (!(Number.isFinite(t) && Number.isFinite(delta))) throw new AppError("argument.not_a_number");
  const logFront = Math.log(2) + (df / 2) * Math.log(df / 2) - logGamma(df / 2);
  const reach = 9 / Math.sqrt(2 * df);
  const low = Math.max(0, 1 - reach);
  const high = 1 + reach;
  // P(Z ≤ t·r − delta) turns from 0 to 1 within a few 1/t about delta/t: panels of its own keep that edge sharp.
  const clip = (r: number) => Math.min(high, Math.max(low, r));
  const edges = t === 0 ? [low, high] : [low, clip((delta - 9) / t), clip((delta + 9) / t), high].sort((a, b) => a - b);
  let sum = 0;
  for (let i = 1; i < edges.length; i++) {
    for (const { x: r, weight } of panelNodes(edges[i - 1] as number, edges[i] as number, 8)) {
      if (r <= 0) continue;
      const density = Math.exp(logFront + (df - 1) * Math.log(r) - 0.5 * df * r * r);
      sum += weight * density * normalCdf(t * r - delta);
    }
  }
  return Math.min(1, Math.max(0, sum));
}
