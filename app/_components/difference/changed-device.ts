import type { StateMarkProps } from "@/app/_components/state/state-mark";
import type { DataColumn, Row } from "@/app/_components/table/column";
import { type FieldChange, formatFieldChange } from "@/lib/domain/format/field-value";
import { toEngineering } from "@/lib/domain/format/quantity";

export type ChangeKind = "added" | "removed" | "values" | "version-only";

/** One serial of a comparison, as `/api/v1/compare` answers it. */
export interface ChangedDevice {
  serial: string;
  change: ChangeKind;
  fields: readonly (FieldChange & { name: string })[];
  /** Bytes that differ, 0…255; null where the image has none. */
  bytes: readonly { at: number; from: number | null; to: number | null }[];
}

/** A field of the layout that may get a column of its own. */
export interface ComparedField {
  name: string;
  unit: string | null;
  /** Shown at once; the others can be chosen. */
  shown: boolean;
  /** A difference, in `unit`, whose decimals the column's figures have; each its own where it is left out. */
  least?: number;
}

export const changeMarks: Record<ChangeKind, StateMarkProps> = {
  values: { tone: "caution", word: "other values", title: "The device gets other values" },
  "version-only": { tone: "idle", word: "version only", title: "Nothing but version numbers and checksums differ" },
  added: { tone: "info", word: "added", title: "Only in the newer of the two" },
  removed: { tone: "bad", shape: "bar", word: "removed", title: "Only in the older of the two" },
};

/** The row of a serial: beside the answer's members, each field by its name, at full precision and as text. */
export function rowOfChange(item: Row, least: ReadonlyMap<string, number>): Row {
  const { fields, bytes } = item as unknown as ChangedDevice;
  const values: Row = {};
  for (const { name, ...change } of fields) {
    const text = formatFieldChange(change, least.get(name));
    values[name] = { ...change, shown: `${text.from ?? "none"} → ${text.to ?? "none"}`, text, step: stepOf(change) };
  }
  // A serial that only one of the two holds has no bytes to compare.
  return { ...item, values, bytesChanged: bytes.length > 0 ? bytes.length : null };
}

/** The step in the engineering unit; a ratio's in ppm. */
function stepOf({ from, to, unit }: FieldChange): number | null {
  if (typeof from !== "number" || typeof to !== "number") return null;
  return unit === "1" ? (to - from) * 1e6 : toEngineering(to - from, unit).value;
}

/** Columns of one field: old → new, step, stored steps; and the two values alone, for the CSV. */
export function columnsOfField({ name, unit, shown }: ComparedField): DataColumn[] {
  const engineering = toEngineering(0, unit).unit;
  const stepUnit = unit === "1" ? "ppm" : engineering;
  const key = `values.${name}`;
  return [
    { key: `${key}.shown`, header: name, unit: engineering, align: "right", format: { as: "code" }, hidden: !shown },
    {
      key: `${key}.step`,
      header: "step",
      unit: stepUnit,
      format: { as: "figure", digits: 2, sign: "always" },
      title: `Step of ${name}`,
      hidden: !shown,
    },
    {
      key: `${key}.steps`,
      header: "LSB",
      unit: "steps",
      format: { as: "figure", digits: 0, sign: "always", group: true },
      title: `Step of ${name} in stored integers`,
      hidden: !shown,
    },
    { key: `${key}.from`, header: `${name} before`, unit: unit ?? "", align: "right", hidden: true },
    { key: `${key}.to`, header: `${name} after`, unit: unit ?? "", align: "right", hidden: true },
  ];
}
