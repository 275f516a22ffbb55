/** Shapes of the uncertainty budget. `null` is "not known", never 0; 0 is "does not enter, by the formula". */

export const BUDGET_SOURCES = [
  "sample.scatter",
  "repeatability.unloaded",
  "repeatability.loaded",
  "sensor.common",
  "sensor.independent",
  "chamber.uniformity",
  "load.certificate",
  "reader.certificate",
  "zero.return",
  "device.thermometer",
] as const;

export type BudgetSource = (typeof BUDGET_SOURCES)[number];

/** One number for each thing the budget is about. */
export interface Effects {
  /** 1/K */
  gainTc: number | null;
  /** mV/V/K */
  zeroTc: number | null;
  /** Error of the corrected output at capacity, in verification intervals v. */
  intervals: number | null;
}

/** One source with its standard uncertainty and what that does; each effect is a standard uncertainty too. */
export interface BudgetLine extends Effects {
  source: BudgetSource;
  /** What was taken, from where, and what of it cancels; where nothing is known, why. */
  words: string;
  distribution: "normal" | "rectangular";
  /** As observed or certified, in `unit`. */
  value: number | null;
  unit: string;
  /** value / divisor = standard */
  divisor: number | null;
  standard: number | null;
  /** Degrees of freedom; null counts as infinitely many. */
  df: number | null;
  /** The source whose gainTc holds this one's already, so that it is not added a second time. */
  within: BudgetSource | null;
}

export interface BudgetEnd {
  temperatureC: number;
  /** Standard uncertainty of the output at capacity, v. */
  combined: number;
  coverageFactor: number;
  expanded: number;
}

/** What an error of the chamber's temperature leaves in the output, in v, by the way gain was found. */
export interface ChamberStatement {
  individual: 0;
  pooled: number | null;
  /** v for each kelvin by which the error differs between the ends of the run. */
  perKelvin: number | null;
  words: string;
}

export interface UncertaintyBudget {
  formula: string;
  /** Coverage probability of the expanded uncertainties. */
  level: number;
  /** The end of the proven range that the lines' intervals stand for, °C. */
  atC: number | null;
  lines: BudgetLine[];
  combined: Effects;
  /** Effective ones; null where infinitely many, and where nothing is combined. */
  degreesOfFreedom: Effects;
  coverageFactor: Effects;
  expanded: Effects;
  /** Lower and upper end of the proven range; empty where nothing is proven. */
  ends: BudgetEnd[];
  /** Sources on which nothing is known, left out of the sums. */
  missing: BudgetSource[];
  chamber: ChamberStatement;
}
