import { extremesOf, type IndexedField } from "./comparison-index";

/** How often a field differs by how much: bins of one width, in stored steps or in the field's unit. */
export interface StepHistogram {
  in: "steps" | "unit";
  /** Lower edge of the first bin. */
  from: number;
  /** Of every bin, above 0. */
  width: number;
  counts: number[];
}

const BINS_MAX = 31;

/**
 * The distribution of a field's difference over the serials in which it differs; null where no difference is a number.
 * Bins of steps are whole steps wide and centred on whole steps, so that none is counted between two.
 */
export function stepHistogram(field: IndexedField): StepHistogram | null {
  const values = field.hasSteps ? field.steps : field.differences;
  const extremes = extremesOf(values);
  if (!extremes) return null;
  const { min, max } = extremes;
  const width = field.hasSteps ? Math.ceil((max - min + 1) / BINS_MAX) : (max - min) / BINS_MAX || Math.abs(min) || 1;
  const from = field.hasSteps ? min - 0.5 : max === min ? min - width / 2 : min;
  const bins = field.hasSteps ? Math.ceil((max - min + 1) / width) : max === min ? 1 : BINS_MAX;
  const counts = new Array<number>(bins).fill(0);
  for (const value of values) {
    if (Number.isNaN(value)) continue;
    const bin = Math.min(Math.floor((value - from) / width), bins - 1);
    counts[bin] = (counts[bin] as number) + 1;
  }
  return { in: field.hasSteps ? "steps" : "unit", from, width, counts };
}
