import type { ChangeCounts, ComparedDevice } from "@/schemas/api/compare";

/** A serial of two packages as compared; serials with the same bytes have no fields. */
export type IndexedDevice = Omit<ComparedDevice, "change" | "bytes"> & { change: ComparedDevice["change"] | "same" };

/** How one field differs, serial by serial; both arrays go with {@link ComparisonIndex.serials}. */
export interface IndexedField {
  name: string;
  unit: string | null;
  /** Carries a value; false for version numbers and checksums. */
  parameter: boolean;
  /** Serials that both packages hold and in which it differs. */
  devices: number;
  /** Newer less older in the field's unit; NaN where it is equal or no number. */
  differences: Float64Array;
  /** The same in stored steps; NaN where it is equal or has none. */
  steps: Float64Array;
  hasSteps: boolean;
}

/** Everything by which the serials that differ can be counted, filtered and ordered without looking at an image again. */
export interface ComparisonIndex {
  counts: ChangeCounts;
  /** Serials that differ, rising. */
  serials: readonly string[];
  changes: readonly ComparedDevice["change"][];
  fields: readonly IndexedField[];
  /**
   * How large the largest step of each serial is: of its parameters the largest |difference| as a share of the largest of that
   * parameter in any serial, 0…1; −1 for a serial that is added or removed.
   */
  largest: Float64Array;
}

interface GatheredField {
  unit: string | null;
  devices: number;
  hasSteps: boolean;
  at: number[];
  differences: number[];
  steps: number[];
}

/** Gathers an index from one serial after the other, in rising order. */
export class ComparisonIndexer {
  readonly #counts: ChangeCounts = { added: 0, removed: 0, values: 0, "version-only": 0, same: 0 };
  readonly #serials: string[] = [];
  readonly #changes: ComparedDevice["change"][] = [];
  readonly #fields = new Map<string, GatheredField>();
  readonly #versionNames: ReadonlySet<string>;

  /** @param versionNames fields that tell only a version, and checksums. */
  constructor(versionNames: ReadonlySet<string>) {
    this.#versionNames = versionNames;
  }

  add({ serial, change, fields }: IndexedDevice): void {
    this.#counts[change]++;
    if (change === "same") return;
    const at = this.#serials.push(serial) - 1;
    this.#changes.push(change);
    if (change === "added" || change === "removed") return;
    for (const field of fields) this.#addField(at, field);
  }

  #addField(at: number, { name, unit, from, to, steps }: ComparedDevice["fields"][number]): void {
    let known = this.#fields.get(name);
    if (!known) {
      known = { unit, devices: 0, hasSteps: false, at: [], differences: [], steps: [] };
      this.#fields.set(name, known);
    }
    known.devices++;
    known.hasSteps ||= steps !== null;
    known.at.push(at);
    known.differences.push(typeof from === "number" && typeof to === "number" ? to - from : Number.NaN);
    known.steps.push(steps ?? Number.NaN);
  }

  finish(): ComparisonIndex {
    const size = this.#serials.length;
    const spread = (at: readonly number[], values: readonly number[]) => {
      const all = new Float64Array(size).fill(Number.NaN);
      at.forEach((place, i) => {
        all[place] = values[i] as number;
      });
      return all;
    };
    const fields = [...this.#fields].map(
      ([name, { unit, devices, hasSteps, at, differences, steps }]): IndexedField => ({
        name,
        unit,
        devices,
        hasSteps,
        parameter: !this.#versionNames.has(name),
        differences: spread(at, differences),
        steps: spread(at, steps),
      }),
    );
    const index = { counts: this.#counts, serials: this.#serials, changes: this.#changes, fields };
    return { ...index, largest: largestSteps(index) };
  }
}

function largestSteps({ changes, fields }: Omit<ComparisonIndex, "largest">): Float64Array {
  const largest = Float64Array.from(changes, (change) => (change === "added" || change === "removed" ? -1 : 0));
  for (const { parameter, differences } of fields) {
    const most = extremesOf(differences)?.most ?? 0;
    if (!parameter || most === 0) continue;
    differences.forEach((difference, at) => {
      const share = Math.abs(difference) / most;
      if (share > (largest[at] as number)) largest[at] = share;
    });
  }
  return largest;
}

/** Least and greatest of the numbers among values, and the largest magnitude; undefined where there is no number. */
export function extremesOf(values: Float64Array): { min: number; max: number; most: number } | undefined {
  let min = Number.POSITIVE_INFINITY;
  let max = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    if (value < min) min = value;
    if (value > max) max = value;
  }
  return min > max ? undefined : { min, max, most: Math.max(Math.abs(min), Math.abs(max)) };
}
