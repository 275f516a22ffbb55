import { AppError } from "@/lib/errors";
import { studentQuantile } from "./distributions";
import { meanOf, standardDeviationOf } from "./sample-statistics";

/** The value furthest from the mean, in units of the sample's standard deviation. */
export interface GrubbsStatistic {
  /** G = max |x − mean| / s. */
  g: number;
  /** Position of that value. */
  index: number;
}

/**
 * Grubbs' statistic for a single outlier.
 * Source: NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.17.1.
 * @param values N ≥ 3 finite values of a population that is about normal.
 * @returns undefined below three values or where they do not scatter.
 */
export function findGrubbsStatistic(values: readonly number[]): GrubbsStatistic | undefined {
  const mean = meanOf(values);
  const sd = standardDeviationOf(values);
  if (mean === null || sd === null || values.length < 3 || !(sd > 0)) return undefined;
  let index = 0;
  let largest = -1;
  values.forEach((value, i) => {
    const distance = Math.abs(value - mean);
    if (distance > largest) {
      largest = distance;
      index = i;
    }
  });
  return { g: largest / sd, index };
}

/**
 * Critical value of G at the level `alpha`, from the t quantile at alpha/n (one side) or alpha/(2n) (two sides).
 * @param n number of values ≥ 3.
 * @throws AppError `grubbs.invalid` {n, alpha}.
 */
export function grubbsCritical(n: number, alpha: number, sides: 1 | 2 = 2): number {
  if (!(Number.isInteger(n) && n >= 3 && alpha > 0 && alpha < 1)) throw new AppError("grubbs.invalid", { n, alpha });
  const t2 = studentQuantile(1 - alpha / (sides * n), n - 2) ** 2;
  return ((n - 1) / Math.sqrt(n)) * Math.sqrt(t2 / (n - 2 + t2));
}
