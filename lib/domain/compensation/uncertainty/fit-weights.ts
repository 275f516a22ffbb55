import type { Order } from "../individual";

/**
 * How each y enters the coefficients of a least-squares polynomial: b_k = Σ weights[k][i]·y_i. The weights depend on x
 * alone, so that errors of the y go through them exactly.
 * @param x as many as the order needs at least, that many of them distinct.
 * @returns order + 1 rows of as many weights as there are x.
 */
export function fitWeights(order: Order, x: readonly number[]): number[][] {
  const n = x.length;
  const mean = x.reduce((sum, value) => sum + value, 0) / n;
  const h = x.reduce((most, value) => Math.max(most, Math.abs(value - mean)), 0) || 1;
  const w = x.map((value) => (value - mean) / h);
  const w2 = w.reduce((sum, value) => sum + value * value, 0);
  const line = w.map((value) => value / w2);
  const m = mean / h;
  if (order === 1) return [line.map((value) => 1 / n - value * m), line.map((value) => value / h)];
  // As in the fit itself: 1, w and w² − skew·w − spread are orthogonal over the points.
  const skew = w.reduce((sum, value) => sum + value ** 3, 0) / w2;
  const spread = w2 / n;
  const p2 = w.map((value) => value * value - skew * value - spread);
  const p2p2 = p2.reduce((sum, value) => sum + value * value, 0);
  const square = p2.map((value) => value / p2p2);
  const slope = line.map((value, i) => value - skew * (square[i] as number));
  return [
    square.map((value, i) => 1 / n - (slope[i] as number) * m + value * (m * m - spread)),
    square.map((value, i) => ((slope[i] as number) - 2 * m * value) / h),
    square.map((value) => value / (h * h)),
  ];
}

/** How each y enters the fitted curve at `at`. */
export function weightsAt(weights: readonly (readonly number[])[], at: number): number[] {
  const [first = []] = weights;
  return first.map((_, i) => weights.reduceRight((sum, row) => sum * at + (row[i] as number), 0));
}
