import { AppError } from "@/lib/errors";

/** The same polynomial in powers of x − x0, x0 being the mean of x: there its coefficients are least entangled. */
interface CentredPolynomial {
  x0: number;
  coefficients: number[];
  covariance: number[][] | null;
}

/** A least-squares polynomial in powers of x. */
export interface Fit {
  /** b0, b1 (, b2): y = b0 + b1·x (+ b2·x²). */
  coefficients: number[];
  /** Standard errors of the coefficients; null without a degree of freedom. */
  standardErrors: number[] | null;
  /** Covariance matrix of the coefficients, row by row; null without a degree of freedom. */
  covariance: number[][] | null;
  /** y − fitted, in the order given. */
  residuals: number[];
  /** Square root of the sum of squares over the degrees of freedom; null without one. */
  residualSd: number | null;
  /** Points less coefficients. */
  degreesOfFreedom: number;
  /** 1 − SSE/SST; null where y does not vary. */
  rSquared: number | null;
  centred: CentredPolynomial;
}

/** Below this share of the spread of x the columns count as dependent. */
const DEPENDENT = 1e-20;

interface Centred {
  n: number;
  meanX: number;
  meanY: number;
  /** Largest |x − mean|. */
  halfWidth: number;
}

function centre(x: readonly number[], y: readonly number[]): Centred | undefined {
  const n = x.length;
  if (n === 0 || y.length !== n) return undefined;
  let sumX = 0;
  let sumY = 0;
  for (let i = 0; i < n; i++) {
    sumX += x[i] as number;
    sumY += y[i] as number;
  }
  if (!Number.isFinite(sumX) || !Number.isFinite(sumY)) return undefined;
  const roughX = sumX / n;
  const roughY = sumY / n;
  let restX = 0;
  let restY = 0;
  let halfWidth = 0;
  for (let i = 0; i < n; i++) {
    restX += (x[i] as number) - roughX;
    restY += (y[i] as number) - roughY;
  }
  const meanX = roughX + restX / n;
  for (let i = 0; i < n; i++) halfWidth = Math.max(halfWidth, Math.abs((x[i] as number) - meanX));
  if (!(halfWidth > Math.abs(meanX) * 1e-14)) return undefined;
  return { n, meanX, meanY: roughY + restY / n, halfWidth };
}

/** A polynomial through points before its deviations are known. */
interface Solution {
  coefficients: number[];
  residuals: number[];
  x0: number;
  centred: number[];
  /** Covariance of the coefficients about x = origin, for a residual variance of 1. */
  unit: (origin: number) => number[][];
  sst: number;
}

/** Adds deviations and R² to a solution. */
function finish({ coefficients, residuals, x0, centred, unit, sst }: Solution): Fit | undefined {
  const degreesOfFreedom = residuals.length - coefficients.length;
  let sse = 0;
  for (const residual of residuals) sse += residual * residual;
  if (!Number.isFinite(sse) || !coefficients.every(Number.isFinite)) return undefined;
  const rSquared = sst > 0 ? 1 - sse / sst : null;
  const about = { x0, coefficients: centred, covariance: null };
  if (degreesOfFreedom < 1) {
    const none = { standardErrors: null, covariance: null, residualSd: null };
    return { coefficients, ...none, residuals, degreesOfFreedom, rSquared, centred: about };
  }
  const variance = sse / degreesOfFreedom;
  const scaled = (origin: number) => unit(origin).map((row) => row.map((value) => value * variance));
  const covariance = scaled(0);
  const standardErrors = covariance.map((row, i) => Math.sqrt(row[i] as number));
  if (!standardErrors.every(Number.isFinite)) return undefined;
  return {
    coefficients,
    standardErrors,
    covariance,
    residuals,
    residualSd: Math.sqrt(variance),
    degreesOfFreedom,
    rSquared,
    centred: { ...about, covariance: scaled(x0) },
  };
}

/**
 * Intercept and slope by the normal equations about the mean of x, solved by elimination: what rounding left of Σ(x − mean)
 * is taken out by it. The order of the operations is part of the result: coefficients are stored as binary64 in images,
 * whose bytes have to be those that any program gets that computes in this, the plainest way.
 */
function lineThrough(x: readonly number[], y: readonly number[]): [intercept: number, slope: number] {
  const n = x.length;
  let sumX = 0;
  for (const value of x) sumX += value;
  const meanX = sumX / n;
  let s1 = 0;
  let s2 = 0;
  let sumY = 0;
  let s1y = 0;
  for (let i = 0; i < n; i++) {
    const dx = (x[i] as number) - meanX;
    s1 += dx;
    s2 += dx * dx;
    sumY += y[i] as number;
    s1y += dx * (y[i] as number);
  }
  const share = s1 / n;
  const slope = (s1y - share * sumY) / (s2 - share * s1);
  return [(sumY - s1 * slope) / n - slope * meanX, slope];
}

/** As {@link fitLine}, undefined where the points do not fix a line. */
export function findLine(x: readonly number[], y: readonly number[]): Fit | undefined {
  const centred = centre(x, y);
  if (!centred) return undefined;
  const { n, meanX, meanY } = centred;
  let sxx = 0;
  let sst = 0;
  for (let i = 0; i < n; i++) {
    const dx = (x[i] as number) - meanX;
    const dy = (y[i] as number) - meanY;
    sxx += dx * dx;
    sst += dy * dy;
  }
  // Beyond a double a square says nothing any more.
  if (!Number.isFinite(sxx) || !Number.isFinite(sst)) return undefined;
  const [intercept, slope] = lineThrough(x, y);
  const residuals = new Array<number>(n);
  for (let i = 0; i < n; i++) residuals[i] = (y[i] as number) - meanY - slope * ((x[i] as number) - meanX);
  const unit = (origin: number) => {
    const shift = meanX - origin;
    const cross = -shift / sxx;
    return [
      [1 / n + (shift * shift) / sxx, cross],
      [cross, 1 / sxx],
    ];
  };
  return finish({ coefficients: [intercept, slope], residuals, x0: meanX, centred: [meanY, slope], unit, sst });
}

/** As {@link fitQuadratic}, undefined where the points do not fix a parabola. */
export function findQuadratic(x: readonly number[], y: readonly number[]): Fit | undefined {
  const centred = centre(x, y);
  if (!centred || centred.n < 3) return undefined;
  const { n, meanX, meanY, halfWidth } = centred;
  // w = (x − mean)/halfWidth, and the polynomials 1, w, w² − skew·w − spread, orthogonal over the points.
  const w = x.map((value) => (value - meanX) / halfWidth);
  let w2 = 0;
  let w3 = 0;
  for (const value of w) {
    w2 += value * value;
    w3 += value * value * value;
  }
  const skew = w3 / w2;
  const spread = w2 / n;
  const p2 = w.map((value) => value * value - skew * value - spread);
  let p2p2 = 0;
  let wy = 0;
  let p2y = 0;
  let sst = 0;
  for (let i = 0; i < n; i++) {
    const dy = (y[i] as number) - meanY;
    const p = p2[i] as number;
    p2p2 += p * p;
    wy += (w[i] as number) * dy;
    p2y += p * dy;
    sst += dy * dy;
  }
  if (!(p2p2 > DEPENDENT * n) || !Number.isFinite(sst)) return undefined;
  const linear = wy / w2;
  const square = p2y / p2p2;
  const residuals = w.map((value, i) => (y[i] as number) - meanY - linear * value - square * (p2[i] as number));
  const inPolynomials = [meanY, linear, square];
  const weights = [1 / n, 1 / w2, 1 / p2p2];
  const product = (a: readonly number[], b: readonly number[], scale: readonly number[]) =>
    a.reduce((sum, value, k) => sum + value * (b[k] as number) * (scale[k] as number), 0);
  // The three polynomials in powers of x − origin: rows b0, b1, b2; columns the polynomials.
  const toPowers = (origin: number) => {
    const shift = (meanX - origin) / halfWidth;
    return [
      [1, -shift, shift * shift + skew * shift - spread],
      [0, 1 / halfWidth, (-2 * shift - skew) / halfWidth],
      [0, 0, 1 / (halfWidth * halfWidth)],
    ];
  };
  const about = (origin: number) => toPowers(origin).map((row) => product(row, inPolynomials, [1, 1, 1]));
  const unit = (origin: number) => {
    const rows = toPowers(origin);
    return rows.map((row) => rows.map((column) => product(row, column, weights)));
  };
  return finish({ coefficients: about(0), residuals, x0: meanX, centred: about(meanX), unit, sst });
}

function degenerate(x: readonly number[], y: readonly number[], needed: number): AppError {
  return new AppError("fit.degenerate", {
    count: Math.min(x.length, y.length),
    distinct: new Set(x).size,
    needed,
    message: `The points do not fix a curve with ${needed} coefficients`,
  });
}

/**
 * Least-squares line y = b0 + b1·x. Sums are taken about the mean of x, so large x keep full precision.
 * @param x N ≥ 2 finite numbers, at least two distinct.
 * @param y as many finite numbers.
 * @returns coefficients in y's unit and y/x, with standard errors, covariance, residuals and R².
 * @throws AppError `fit.degenerate` {count, distinct, needed}; never returns NaN.
 */
export function fitLine(x: readonly number[], y: readonly number[]): Fit {
  const fit = findLine(x, y);
  if (!fit) throw degenerate(x, y, 2);
  return fit;
}

/**
 * Least-squares parabola y = b0 + b1·x + b2·x², by polynomials orthogonal over the points, about the mean of x.
 * @param x N ≥ 3 finite numbers, at least three distinct.
 * @param y as many finite numbers.
 * @returns coefficients in powers of x, with standard errors, covariance, residuals and R².
 * @throws AppError `fit.degenerate` {count, distinct, needed}; never returns NaN.
 */
export function fitQuadratic(x: readonly number[], y: readonly number[]): Fit {
  const fit = findQuadratic(x, y);
  if (!fit) throw degenerate(x, y, 3);
  return fit;
}
