import type { FieldDifference } from "@/builders/codec/difference";
import type { ChangeCounts, FieldSummary } from "@/schemas/api/compare";

/** What two packages differ in, over all serials. */
export interface ComparisonOverview {
  counts: ChangeCounts;
  /** Fields that changed in a serial which both hold, in the order in which they turned up. */
  fields: FieldSummary[];
}

/** Gathers an overview from one serial after the other. */
export class OverviewCounter {
  readonly #counts: ChangeCounts = { added: 0, removed: 0, values: 0, "version-only": 0, same: 0 };
  readonly #fields = new Map<string, FieldSummary>();

  add({ change, fields }: { change: keyof ChangeCounts; fields: readonly FieldDifference[] }): void {
    this.#counts[change]++;
    if (change === "added" || change === "removed") return;
    for (const field of fields) this.#addField(field);
  }

  finish(): ComparisonOverview {
    return { counts: this.#counts, fields: [...this.#fields.values()] };
  }

  #addField({ name, unit, steps }: FieldDifference): void {
    const known = this.#fields.get(name);
    if (!known) {
      this.#fields.set(name, { name, unit, devices: 1, stepsMin: steps, stepsMax: steps });
      return;
    }
    known.devices++;
    known.stepsMin = extremeOf(known.stepsMin, steps, Math.min);
    known.stepsMax = extremeOf(known.stepsMax, steps, Math.max);
  }
}

/** The lesser (or greater) of two counts of steps; null where one of them is none. */
function extremeOf(a: number | null, b: number | null, choose: (a: number, b: number) => number): number | null {
  return a === null || b === null ? null : choose(a, b);
}
