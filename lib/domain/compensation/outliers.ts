import { studentQuantile } from "./distributions";
import { findGrubbsStatistic, grubbsPower } from "./grubbs";

/** Below this many values nothing is an outlier by its distance from the median. */
const ROBUST_MIN = 5;
/** The usual limit of the modified score: Iglewicz and Hoaglin (1993), NIST/SEMATECH e-Handbook 1.3.5.17. */
const USUAL_LIMIT = 3.5;
/** 1/Φ⁻¹(3/4), and √(π/2): they bring the two deviations to a normal standard deviation. */
const PER_MEDIAN_DEVIATION = 1.4826022185056018;
const PER_MEAN_DEVIATION = 1.2533141373155003;
/** The median deviation of a normal sample is known about as well as a standard deviation from 0.4 as many values. */
const EFFICIENCY = 0.4;

function medianOfSorted(sorted: ArrayLike<number>): number {
  const half = sorted.length >> 1;
  const upper = sorted[half] as number;
  return sorted.length % 2 === 1 ? upper : ((sorted[half - 1] as number) + upper) / 2;
}

/** Median of at least one value. */
export function medianOf(values: readonly number[]): number {
  return medianOfSorted(Float64Array.from(values).sort());
}

/** Values that stand out by one test or the other. */
export interface Outlier {
  /** Position among the values. */
  index: number;
  /** Distance from the median in robust standard deviations, signed; null where the median test does not find it. */
  score: number | null;
  threshold: number | null;
  /** Grubbs' G and critical value; null where that test does not find it. */
  g: number | null;
  critical: number | null;
  /** What Grubbs' test can see with so many values; null where it does not find it. */
  caveat: string | null;
}

/** Levels of the two tests, each shared over all values. */
export interface OutlierLevels {
  robust: number;
  grubbs: number;
}

export interface OutlierSearch {
  median: number;
  outliers: Outlier[];
}

/**
 * Limit of the modified score over n values: 3.5, or the two-sided t quantile at level/n with 0.4·(n − 1) degrees of
 * freedom where that is more, so that one clean normal sample in 1/level at most has an outlier. Checked by Monte Carlo.
 */
export function modifiedScoreLimit(n: number, level: number): number {
  const freedom = Math.max(1, EFFICIENCY * (n - 1));
  return Math.max(USUAL_LIMIT, studentQuantile(1 - level / (2 * n), freedom));
}

function robust(values: readonly number[], median: number, level: number): Outlier[] {
  if (values.length < ROBUST_MIN) return [];
  const distances = values.map((value) => Math.abs(value - median));
  const medianDeviation = medianOf(distances) * PER_MEDIAN_DEVIATION;
  // Where more than half are equal the median deviation is 0; the mean one still tells.
  const scale =
    medianDeviation > 0
      ? medianDeviation
      : (distances.reduce((sum, distance) => sum + distance, 0) / values.length) * PER_MEAN_DEVIATION;
  if (!(scale > 0)) return [];
  const threshold = modifiedScoreLimit(values.length, level);
  const outliers: Outlier[] = [];
  values.forEach((value, index) => {
    const score = (value - median) / scale;
    if (Math.abs(score) > threshold) outliers.push({ index, score, threshold, g: null, critical: null, caveat: null });
  });
  return outliers;
}

/**
 * Outliers by their distance from the median, which several outliers can't hide, and by Grubbs' test on the furthest one,
 * which in small samples sees more.
 */
export function findOutliers(values: readonly number[], levels: OutlierLevels): OutlierSearch {
  if (values.length < 3) return { median: values.length > 0 ? medianOf(values) : 0, outliers: [] };
  const median = medianOf(values);
  const outliers = robust(values, median, levels.robust);
  const furthest = findGrubbsStatistic(values);
  if (!furthest) return { median, outliers };
  const { critical, words: caveat } = grubbsPower(values.length, levels.grubbs);
  const { g, index } = furthest;
  if (g <= critical) return { median, outliers };
  const known = outliers.find((one) => one.index === index);
  if (known) Object.assign(known, { g, critical, caveat });
  else outliers.push({ index, score: null, threshold: null, g, critical, caveat });
  return { median, outliers };
}
