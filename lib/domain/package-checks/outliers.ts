import { formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { EVIDENCE_MAX, type PackageCheck } from "./check";

/** The values of one field over all packed devices. */
export interface FieldValues {
  name: string;
  unit: string | null;
  /** In the order of the serials; any that are not finite are left out of the judgement. */
  values: Float64Array;
}

export interface OutlierFacts {
  /** In the order of the values. */
  serials: readonly string[];
  fields: readonly FieldValues[];
  /** Robust standard deviations. */
  threshold: number;
}

/** Makes the median absolute deviation of a normal distribution its standard deviation: 1/Φ⁻¹(3/4). */
const NORMAL_MAD = 1.482602218505602;

/** Fewer values have no middle to stand out from. */
const LEAST_VALUES = 5;

interface Spread {
  median: number;
  /** Robust standard deviation, in the field's unit. */
  deviation: number;
}

/**
 * Median and 1.4826 times the median absolute deviation (F. R. Hampel, J. Amer. Statist. Assoc. 69, 1974); undefined where
 * there are too few values, or more than half of them are the same.
 */
export function robustSpread(values: Float64Array): Spread | undefined {
  const finite = values.filter(Number.isFinite);
  if (finite.length < LEAST_VALUES) return undefined;
  const median = medianOf(finite);
  const deviation = NORMAL_MAD * medianOf(finite.map((value) => Math.abs(value - median)));
  return deviation > 0 ? { median, deviation } : undefined;
}

/** Sorts what it is given. */
function medianOf(values: Float64Array): number {
  values.sort();
  const half = values.length >> 1;
  const upper = values[half] as number;
  return values.length % 2 === 1 ? upper : ((values[half - 1] as number) + upper) / 2;
}

/** Whether a device holds a value that no other of its lot is near. */
export function checkOutliers({ serials, fields, threshold }: OutlierFacts): PackageCheck {
  const judged = fields.map((field) => ({ field, spread: robustSpread(field.values) }));
  const outliers: Outlier[] = [];
  let count = 0;
  for (const { field, spread } of judged) {
    if (!spread) continue;
    field.values.forEach((value, i) => {
      const score = Math.abs(value - spread.median) / spread.deviation;
      if (!(score > threshold)) return;
      count++;
      outliers.push({ serial: serials[i] as string, field: field.name, unit: field.unit, value, score });
    });
  }
  outliers.sort((a, b) => b.score - a.score);
  const spread = judged.filter((one) => one.spread);
  return {
    code: "outliers",
    verdict: count > 0 ? "warn" : "pass",
    message: outlierMessage(outliers, count, spread.length, threshold),
    evidence: {
      devices: serials.length,
      threshold,
      fields: judged.map(({ field, spread: of }) => ({ ...rowOf(field, serials, of), threshold })),
      outliers: { count, items: outliers.slice(0, EVIDENCE_MAX) },
    },
  };
}

interface Outlier {
  serial: string;
  field: string;
  unit: string | null;
  value: number;
  score: number;
}

function outlierMessage(outliers: readonly Outlier[], count: number, judged: number, threshold: number): string {
  const [worst] = outliers;
  const limit = `${threshold} robust standard deviations`;
  if (worst)
    return `${formatNumberOf(count, "value stands", "values stand")} out by more than ${limit}, most ${worst.field} of ${worst.serial} by ${formatFigure(worst.score, { digits: 1 })}.`;
  if (judged === 0) return "No field has a spread to stand out from.";
  return `No value of ${formatNumberOf(judged, "field")} stands out by more than ${limit} from its median.`;
}

function rowOf({ name, unit, values }: FieldValues, serials: readonly string[], spread: Spread | undefined) {
  if (!spread) return { name, unit, median: null, deviation: null, largestScore: null, serial: null };
  let far = -1;
  values.forEach((value, i) => {
    const known = far < 0 ? -1 : Math.abs((values[far] as number) - spread.median);
    if (Math.abs(value - spread.median) > known) far = i;
  });
  const largestScore = Math.abs((values[far] as number) - spread.median) / spread.deviation;
  return { name, unit, ...spread, largestScore, serial: serials[far] as string };
}
