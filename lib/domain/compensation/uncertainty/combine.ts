import { studentQuantile } from "../distributions";

/** The coverage probability for which a normal distribution has the factor 2. */
export const COVERAGE_LEVEL = 0.9545;

/** One contribution: a standard uncertainty times its sensitivity, with degrees of freedom (null: infinitely many). */
export interface Contribution {
  standard: number;
  df: number | null;
}

export interface Combined {
  standard: number;
  /** Effective degrees of freedom; null where infinitely many. */
  degreesOfFreedom: number | null;
  coverageFactor: number;
  expanded: number;
}

/**
 * Root sum of squares of independent contributions, with the degrees of freedom of Welch and Satterthwaite,
 * ν = u⁴ / Σ (u_i⁴/ν_i), and the two-sided t factor for 95.45 % at ν cut to a whole number (2.00 where ν is infinite).
 * Source: JCGM 100:2008, 5.1.2, G.4.1 and G.6.4 (clauses from memory).
 * @returns undefined without a contribution.
 */
export function combine(contributions: readonly Contribution[]): Combined | undefined {
  if (contributions.length === 0) return undefined;
  const variance = contributions.reduce((sum, { standard }) => sum + standard * standard, 0);
  const shared = contributions.reduce((sum, { standard, df }) => sum + (df === null ? 0 : standard ** 4 / df), 0);
  const standard = Math.sqrt(variance);
  const degreesOfFreedom = shared > 0 ? (variance * variance) / shared : null;
  const coverageFactor = coverageFactorOf(degreesOfFreedom);
  return { standard, degreesOfFreedom, coverageFactor, expanded: coverageFactor * standard };
}

/** Beyond this many the t factor is the normal one to all digits shown. */
const MANY = 1e6;

/** Two-sided t factor for 95.45 %; 2 for infinitely many degrees of freedom. @param df ≥ 1, null for infinitely many */
export function coverageFactorOf(df: number | null): number {
  if (df === null || df > MANY) return 2;
  // A sum of contributions of one degree each can fall below 1 by rounding only.
  return studentQuantile((1 + COVERAGE_LEVEL) / 2, Math.max(1, Math.floor(df + 1e-9)));
}
