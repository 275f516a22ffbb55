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

/**
 * Lower and upper regularised incomplete gamma functions P(a, x) and Q(a, x): the series below a + 1, the continued
 * fraction above, so that each keeps its relative precision where it is small.
 * Source: Abramowitz and Stegun 6.5.29 and 6.5.31.
 * @param a > 0, finite. @param x any number but NaN; below 0 counts as 0.
 * @param logGammaA ln Γ(a), for callers with many x and one a.
 */
export function incompleteGamma(
  a: number,
  x: number,
  logGammaA: number = logGamma(a),
): { lower: number; upper: number } {
  if (x <= 0) return { lower: 0, upper: 1 };
  if (x === Number.POSITIVE_INFINITY) return { lower: 1, upper: 0 };
  const front = Math.exp(a * Math.log(x) - x - logGammaA);
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

/**
 * Regularised incomplete beta function I_x(a, b) by its continued fraction (Lentz).
 * Source: Abramowitz and Stegun 26.5.8.
 * @param x 0…1. @param y 1 − x, asked for apart because the caller may know it better than the subtraction.
 * @param a, b > 0, finite.
 */
export function incompleteBeta(x: number, y: number, a: number, b: number): number {
  if (x <= 0) return 0;
  if (y <= 0) return 1;
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(y, x, b, a);
  const powers = a * Math.log(x) + b * (x < 0.5 ? Math.log1p(-x) : Math.log(y));
  const front = Math.exp(logGamma(a + b) - logGamma(a) - logGamma(b) + powers) / a;
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
  return Math.min(1, front * h);
}
