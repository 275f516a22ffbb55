import type { ComparedDevice } from "@/schemas/api/compare";
import type { ComparisonIndex, IndexedField } from "./comparison-index";

/** Which serials of a comparison, and in which order. */
export interface SerialSelection {
  change?: ComparedDevice["change"];
  /** Only serials in which this field differs. */
  field?: string;
  /** And by at least so much: in stored steps where the field has them, else in its unit. */
  least?: number;
  /** Part of a serial. */
  search?: string;
  /** `serial`, `largest` step, or the name of a field: by its difference with its sign. */
  sort: string;
  descending: boolean;
}

/** The measure that a field is filtered and ordered by. */
function measureOf(field: IndexedField): Float64Array {
  return field.hasSteps ? field.steps : field.differences;
}

const none = new Float64Array(0);

function findField(index: ComparisonIndex, name: string | undefined): Float64Array | undefined {
  if (name === undefined) return undefined;
  const field = index.fields.find((one) => one.name === name);
  return field ? measureOf(field) : none;
}

/** Places in {@link ComparisonIndex.serials} of the serials wanted, in the order wanted; equal ones by serial. */
export function selectSerials(index: ComparisonIndex, selection: SerialSelection): number[] {
  const { change, field, least = 0, search, sort, descending } = selection;
  const measure = findField(index, field);
  const wanted = search?.toUpperCase();
  const places: number[] = [];
  index.serials.forEach((serial, at) => {
    if (change !== undefined && index.changes[at] !== change) return;
    if (measure && !(Math.abs(measure[at] ?? Number.NaN) >= least)) return;
    if (wanted !== undefined && !serial.includes(wanted)) return;
    places.push(at);
  });
  return order(places, index, sort, descending);
}

function order(places: number[], index: ComparisonIndex, sort: string, descending: boolean): number[] {
  if (sort === "serial") return descending ? places.reverse() : places;
  const values = sort === "largest" ? index.largest : (findField(index, sort) ?? none);
  const sign = descending ? -1 : 1;
  return places.sort((a, b) => {
    const [left, right] = [values[a] ?? Number.NaN, values[b] ?? Number.NaN];
    // What has no difference stands last, whichever the direction.
    if (Number.isNaN(left) || Number.isNaN(right))
      return Number(Number.isNaN(left)) - Number(Number.isNaN(right)) || a - b;
    return sign * (left - right) || a - b;
  });
}
