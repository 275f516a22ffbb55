import { distanceK, gainAt, zeroAt } from "./predict";
import type { Coefficients, FamilyRules } from "./types";

/** Temperatures at which two sets are held against each other; both are smooth, so that these find the largest effect. */
const STEPS = 40;

export interface CapacityEffect {
  /** What the reading at capacity changes by where it changes most, signed, in verification intervals. */
  intervals: number;
  /** Chamber temperature at which it does, °C. */
  atC: number;
}

/**
 * What one device's reading at capacity changes by when its set `from` is replaced by `to`: the signal that `from` turns into
 * exactly the capacity, N/gain(d) + zero(d), is put through `to`, (y/N − 1)·n intervals. Each set places the temperature
 * by its own thermometer, as the device would. The largest change over the range at 41 even steps, the ends among them.
 * @param rangeC lowest and highest chamber temperature, °C.
 * @returns undefined where a set can't be applied: tempSlope or gain of 0.
 */
export function capacityEffect(
  from: Coefficients,
  to: Coefficients,
  { referenceC, nominalMvV, intervals }: Pick<FamilyRules, "referenceC" | "nominalMvV" | "intervals">,
  [lowC, highC]: readonly [number, number],
): CapacityEffect | undefined {
  if (from.tempSlope === 0) return undefined;
  let worst: CapacityEffect | undefined;
  for (let step = 0; step <= STEPS; step++) {
    const chamberC = lowC + ((highC - lowC) * step) / STEPS;
    const dFrom = chamberC - referenceC;
    const dTo = distanceK(to, (chamberC - from.tempOffset) / from.tempSlope, referenceC);
    const signalMvV = nominalMvV / gainAt(from, dFrom) + zeroAt(from, dFrom);
    const change = (((signalMvV - zeroAt(to, dTo)) * gainAt(to, dTo)) / nominalMvV - 1) * intervals;
    if (!Number.isFinite(change)) return undefined;
    if (!worst || Math.abs(change) > Math.abs(worst.intervals)) worst = { intervals: change, atC: chamberC };
  }
  return worst;
}

/**
 * The temperatures over which two derivations are compared: what both prove; where they have nothing in common, or prove
 * nothing at all as imports do, the family's range, which is then not proven.
 */
export function comparedRange(
  from: readonly [number, number] | null,
  to: readonly [number, number] | null,
  family: Pick<FamilyRules, "temperatureMinC" | "temperatureMaxC">,
): { range: [number, number]; proven: boolean } {
  const one = from ?? to;
  const other = to ?? from;
  if (one && other) {
    const range: [number, number] = [Math.max(one[0], other[0]), Math.min(one[1], other[1])];
    if (range[0] <= range[1]) return { range, proven: from !== null && to !== null };
  }
  return { range: [family.temperatureMinC, family.temperatureMaxC], proven: false };
}
