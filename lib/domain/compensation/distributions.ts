import { AppError } from "@/lib/errors";
import { panelNodes } from "./integrate";
import { findRoot } from "./root";

/** Lanczos coefficients, g = 7, n = 9. */
const LANCZOS = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
  12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
] as const;

/** Natural logarithm of the gamma function for x > 0 (Lanczos). */
export function logGamma(x: number): number {
  if (x < 0.5) return Math.log(Math.PI / Math.sin(Math.PI * x)) - logGamma(1 - x);
  let sum: number = LANCZOS[0];
  for (let i = 1; i < LANCZOS.length; i++) sum += (LANCZOS[i] as number) / (x - 1 + i);
  const base = x + 6.5;
  return 0.5 * Math.log(2 * Math.PI) + (x - 0.5) * Math.log(base) - base + Math.log(sum);
}

const TINY = 1e-300;

/** Lower and upper regularised incomplete gamma functions P(a, x), Q(a, x): series below a + 1, fraction above. */
function incompleteGamma(a: number, x: number): { lower: number; upper: number } {
  if (x <= 0) return { lower: 0, upper: 1 };
  const front = Math.exp(a * Math.log(x) - x - logGamma(a));
  if (x < a + 1) {
    let term = 1 / a;
    let sum = term;
    for (let k = 1; k < 10_000 && term > sum * 1e-17; k++) {
      term *= x / (a + k);
      sum += term;
    }
    const lower = Math.min(1, front * sum);
    return { lower, upper: 1 - lower };
  }
  let b = x + 1 - a;
  let c = 1 / TINY;
  let d = 1 / b;
  let h = d;
  for (let k = 1; k < 10_000; k++) {
    const factor = -k * (k - a);
    b += 2;
    d = 1 / (factor * d + b || TINY);
    c = b + factor / c || TINY;
    h *= d * c;
    if (Math.abs(d * c - 1) < 1e-16) break;
  }
  const upper = Math.min(1, front * h);
  return { lower: 1 - upper, upper };
}

/** Regularised incomplete beta function I_x(a, b) by its continued fraction (Lentz). */
function incompleteBeta(x: number, a: number, b: number): number {
  if (x <= 0) return 0;
  if (x >= 1) return 1;
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(1 - x, b, a);
  const front = Math.exp(logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x)) / a;
  let c = 1;
  let d = 1 / (1 - ((a + b) * x) / (a + 1) || TINY);
  let h = d;
  for (let m = 1; m < 10_000; m++) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m));
    d = 1 / (1 + even * d || TINY);
    c = 1 + even / c || TINY;
    h *= d * c;
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
    d = 1 / (1 + odd * d || TINY);
    c = 1 + odd / c || TINY;
    h *= d * c;
    if (Math.abs(d * c - 1) < 1e-16) break;
  }
  return front * h;
}

function assertProbability(p: number): void {
  if (!(p > 0 && p < 1)) throw new AppError("probability.out_of_range", { value: p });
}

function assertFreedom(df: number): void {
  if (!(df > 0 && Number.isFinite(df))) throw new AppError("freedom.out_of_range", { value: df });
}

/** Density of the standard normal distribution. */
export function normalDensity(z: number): number {
  return Math.exp(-0.5 * z * z) / Math.sqrt(2 * Math.PI);
}

/** P(Z ≤ z) of the standard normal distribution; the far tails keep their relative precision. */
export function normalCdf(z: number): number {
  const { lower, upper } = incompleteGamma(0.5, 0.5 * z * z);
  return z < 0 ? 0.5 * upper : 0.5 + 0.5 * lower;
}

/**
 * z with P(Z ≤ z) = p.
 * @throws AppError `probability.out_of_range` unless 0 < p < 1.
 */
export function normalQuantile(p: number): number {
  assertProbability(p);
  if (p === 0.5) return 0;
  if (p > 0.5) return -normalQuantile(1 - p);
  return findRoot((z) => Math.log(normalCdf(z)) - Math.log(p), -40, 0);
}

/**
 * P(X ≤ x) of the chi-square distribution.
 * @throws AppError `freedom.out_of_range` unless df > 0.
 */
export function chiSquareCdf(x: number, df: number): number {
  assertFreedom(df);
  return incompleteGamma(df / 2, x / 2).lower;
}

/** P(X > x) of the chi-square distribution. @throws as {@link chiSquareCdf} */
export function chiSquareUpper(x: number, df: number): number {
  assertFreedom(df);
  return incompleteGamma(df / 2, x / 2).upper;
}

/**
 * x with P(X ≤ x) = p for the chi-square distribution.
 * @throws AppError `probability.out_of_range` or `freedom.out_of_range`.
 */
export function chiSquareQuantile(p: number, df: number): number {
  assertProbability(p);
  assertFreedom(df);
  let high = df + 10;
  while (chiSquareCdf(high, df) < p) high *= 2;
  let low = Math.min(1, df);
  while (chiSquareCdf(low, df) > p) low /= 4;
  return findRoot((x) => chiSquareCdf(x, df) - p, low, high);
}

/**
 * P(T ≤ t) of Student's distribution.
 * @throws AppError `freedom.out_of_range` unless df > 0.
 */
export function studentCdf(t: number, df: number): number {
  assertFreedom(df);
  const tail = 0.5 * incompleteBeta(df / (df + t * t), df / 2, 0.5);
  return t < 0 ? tail : 1 - tail;
}

/**
 * t with P(T ≤ t) = p for Student's distribution.
 * @throws AppError `probability.out_of_range` or `freedom.out_of_range`.
 */
export function studentQuantile(p: number, df: number): number {
  assertProbability(p);
  assertFreedom(df);
  if (p === 0.5) return 0;
  if (p > 0.5) return -studentQuantile(1 - p, df);
  let low = -10;
  while (studentCdf(low, df) > p) low *= 4;
  return findRoot((t) => studentCdf(t, df) - p, low, 0);
}

/**
 * P(T ≤ t) of the noncentral t distribution, by integrating P(Z ≤ t·r − delta) over the density of r = √(χ²/df).
 * @throws AppError `freedom.out_of_range` unless df > 0.
 */
export function noncentralTCdf(t: number, df: number, delta: number): number {
  assertFreedom(df);
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
