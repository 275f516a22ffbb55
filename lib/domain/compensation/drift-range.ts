import type { DriftCurve, DriftValue } from "./predict";

/** What many devices span together at one point of their runs. */
export interface DriftRange {
  /** Mean chamber temperature of the point, °C. */
  chamberC: number;
  before: [low: number, high: number];
  after: [low: number, high: number];
}

interface Gathered {
  count: number;
  chamberSum: number;
  before: [number, number];
  after: [number, number];
}

const widen = ([low, high]: [number, number], value: number): [number, number] => [
  Math.min(low, value),
  Math.max(high, value),
];

/**
 * Gathers drift curves of many devices into the range they span, point by point in rising temperature: devices of one run
 * were read at the same points, so that the first value of each belongs together, and so on. Devices with another number
 * of points than the first are counted apart and not mixed in.
 */
export class DriftRangeGatherer {
  readonly #points: Gathered[] = [];
  /** Devices gathered. */
  devices = 0;
  /** Devices with another number of points, which are not in the range. */
  others = 0;

  add({ before, after }: DriftCurve): void {
    if (this.devices === 0)
      for (const _ of before)
        this.#points.push({ count: 0, chamberSum: 0, before: [Infinity, -Infinity], after: [Infinity, -Infinity] });
    if (before.length !== this.#points.length) {
      this.others++;
      return;
    }
    this.devices++;
    for (const [index, point] of this.#points.entries()) {
      const was = before[index] as DriftValue;
      point.count++;
      point.chamberSum += was.chamberC;
      point.before = widen(point.before, was.value);
      point.after = widen(point.after, (after[index] as DriftValue).value);
    }
  }

  /** @returns by rising temperature; empty where nothing was added. */
  finish(): DriftRange[] {
    return this.#points
      .filter(({ count }) => count > 0)
      .map(({ count, chamberSum, before, after }) => ({ chamberC: chamberSum / count, before, after }));
  }
}
