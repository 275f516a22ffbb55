import { AppError } from "@/lib/errors";
import { studentQuantile } from "./distributions";
import { meanOf, standardDeviationOf } from "./sample-statistics";

/** Where an outlier is looked for: on either side of the mean, or above or below it alone. */
export type GrubbsSide = "both" | "high" | "low";

/** The value furthest from the mean, in units of the sample's standard deviation. */
export interface GrubbsStatistic {
  /** G = max |x − mean| / s; one-sided (max − mean) / s or (mean − min) / s. */
  g: number;
  /** Position of that value, the first of equals. */
  index: number;
}

/**
 * Grubbs' statistic for a single outlier.
 * Source: NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.17.1.
 * @param values N ≥ 3 finite values of a population that is about normal.
 * @returns undefined below three values or where they do not scatter.
 * @throws AppError `values.not_finite`.
 */
export function findGrubbsStatistic(values: readonly number[], side: GrubbsSide = "both"): GrubbsStatistic | undefined {
  const mean = meanOf(values);
  const sd = standardDeviationOf(values);
  if (mean === null || sd === null || values.length < 3 || !(sd > 0)) return undefined;
  let index = 0;
  let largest = Number.NEGATIVE_INFINITY;
  values.forEach((value, i) => {
    const above = value - mean;
    const distance = side === "both" ? Math.abs(above) : side === "high" ? above : -above;
    if (distance > largest) {
      largest = distance;
      index = i;
    }
  });
  return { g: largest / sd, index };
}

/** t at alpha/n (one side) or alpha/(2n) (two sides) with n − 2 degrees of freedom. */
function criticalT(n: number, alpha: number, sides: 1 | 2): number {
  if (!(Number.isInteger(n) && n >= 3 && alpha > 0 && alpha < 1)) throw new AppError("grubbs.invalid", { n, alpha });
  return studentQuantile(1 - alpha / (sides * n), n - 2);
}

/**
 * Critical value of G at the level `alpha`, from the t quantile at alpha/n (one side) or alpha/(2n) (two sides).
 * Source: NIST/SEMATECH e-Handbook, 1.3.5.17.1.
 * @param n number of values ≥ 3.
 * @throws AppError `grubbs.invalid` {n, alpha}.
 */
export function grubbsCritical(n: number, alpha: number, sides: 1 | 2 = 2): number {
  const t2 = criticalT(n, alpha, sides) ** 2;
  return ((n - 1) / Math.sqrt(n)) * Math.sqrt(t2 / (n - 2 + t2));
}

/** What the test can and can't see with n values. */
export interface GrubbsPower {
  critical: number;
  /** G's greatest possible value, (n − 1)/√n: reached when all values but one are the same. */
  greatest: number;
  /**
   * How far a value has to be from the mean of the others to count as an outlier, in standard deviations of the
   * others: t·√(n/(n − 1)), the critical value without the value under test in its own yardstick.
   */
  reach: number;
  /** The caveat as people read it. */
  words: string;
}

/** From so few values on, one in a sample moves its own yardstick too much. */
const FEW = 6;

function caveat(n: number, critical: number, greatest: number, reach: number): string {
  const only =
    `a value counts as an outlier only when it is more than ${reach.toFixed(1)} standard deviations of the others ` +
    "from their mean";
  if (n === 3)
    return (
      `On 3 values the test is nearly powerless: G can never exceed ${greatest.toFixed(4)}, its critical value is ` +
      `${critical.toFixed(4)}, and ${only}. That none is found says nothing.`
    );
  const weak = n <= FEW ? `On ${n} values the test is weak: ${only}.` : `On ${n} values ${only}.`;
  return `${weak} It looks for a single outlier in a normal population: two on one side can hide each other.`;
}

/**
 * What Grubbs' test is worth on n values.
 * @param n number of values ≥ 3.
 * @throws AppError `grubbs.invalid` {n, alpha}.
 */
export function grubbsPower(n: number, alpha: number, sides: 1 | 2 = 2): GrubbsPower {
  const critical = grubbsCritical(n, alpha, sides);
  const greatest = (n - 1) / Math.sqrt(n);
  const reach = criticalT(n, alpha, sides) * Math.sqrt(n / (n - 1));
  return { critical, greatest, reach, words: caveat(n, critical, greatest, reach) };
}
