import { AppError } from "@/lib/errors";

/** What is not a number in a sample, or overflows on the way, must not travel on as one. */
function finite(value: number): number {
  if (!Number.isFinite(value)) throw new AppError("values.not_finite");
  return value;
}

/**
 * Mean of a sample. A second pass takes up what the first rounding lost, so that large values with a small
 * scatter keep their digits.
 * @param values N ≥ 1 finite numbers.
 * @returns the mean, null for an empty sample.
 * @throws AppError `values.not_finite`, also where the sum is beyond a double.
 */
export function meanOf(values: readonly number[]): number | null {
  if (values.length === 0) return null;
  let sum = 0;
  for (const value of values) sum += value;
  const rough = sum / values.length;
  let rest = 0;
  for (const value of values) rest += value - rough;
  return finite(rough + rest / values.length);
}

/**
 * Sample standard deviation with n − 1, from differences to the mean.
 * @param values finite numbers.
 * @returns the deviation in the values' unit, null below two values.
 * @throws AppError `values.not_finite`, also where a square is beyond a double.
 */
export function standardDeviationOf(values: readonly number[]): number | null {
  const mean = meanOf(values);
  if (mean === null || values.length < 2) return null;
  let squares = 0;
  let rest = 0;
  for (const value of values) {
    const difference = value - mean;
    squares += difference * difference;
    rest += difference;
  }
  const about = finite(squares - (rest * rest) / values.length);
  return Math.sqrt(Math.max(0, about) / (values.length - 1));
}

/** Largest less smallest value; 0 for none or one. @throws AppError `values.not_finite`. */
export function spreadOf(values: readonly number[]): number {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  return values.length === 0 ? 0 : finite(high - low);
}
