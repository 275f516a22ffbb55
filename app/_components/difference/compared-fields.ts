import type { ComparedField } from "@/app/_components/difference/changed-device";
import type { FieldSummary } from "@/schemas/api/compare";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";

/** So many changed parameters get their columns at once; beyond that they are chosen. */
const SHOWN_AT_ONCE = 3;

const sourceOf = (field: LayoutField) => ("from" in field.value ? field.value.from : "");

/** Fields that say which version something is, not what it is. */
const isVersion = (field: LayoutField) => /^(layout|package)\./.test(sourceOf(field));

/** Changed fields that carry values: no version numbers, no checksums. Steps can be told in the unit where there is a scale. */
export function changedParameters(
  summary: readonly FieldSummary[],
  layout: LayoutDocument,
): (FieldSummary & { scale: number | null })[] {
  const byName = new Map(layout.fields.map((field) => [field.name, field]));
  const sums = new Set(layout.checksums.map((sum) => sum.name));
  return summary.flatMap((field) => {
    const known = byName.get(field.name);
    if (sums.has(field.name) || (known && isVersion(known))) return [];
    const isInteger = known !== undefined && /^[iu]\d+$/.test(known.type);
    return [{ ...field, scale: isInteger ? (known.scale ?? 1) : null }];
  });
}

/** Columns of the table: the changed parameters at once, everything else of the layout on demand. */
export function comparedFields(summary: readonly FieldSummary[], layout: LayoutDocument): ComparedField[] {
  const parameters = changedParameters(summary, layout);
  const changed = parameters.map((field) => field.name);
  const least = new Map(parameters.map((field) => [field.name, leastOf(field)]));
  const names = new Map<string, string | null>(layout.fields.map((field) => [field.name, field.unit ?? null]));
  for (const field of summary) if (!names.has(field.name)) names.set(field.name, field.unit);
  const order = [...changed, ...[...names.keys()].filter((name) => !changed.includes(name))];
  return order.map((name) => ({
    name,
    unit: names.get(name) ?? null,
    shown: changed.indexOf(name) >= 0 && changed.indexOf(name) < SHOWN_AT_ONCE,
    least: least.get(name),
  }));
}

/** The lesser of the extreme steps, in the field's unit; undefined where steps say nothing. */
function leastOf({ stepsMin, stepsMax, scale }: FieldSummary & { scale: number | null }): number | undefined {
  if (stepsMin === null || stepsMax === null || scale === null) return undefined;
  const sizes = [Math.abs(stepsMin), Math.abs(stepsMax)].filter((size) => size > 0);
  return sizes.length > 0 ? Math.min(...sizes) * scale : undefined;
}
