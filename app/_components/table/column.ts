import type { ReactNode } from "react";
import type { StateKind } from "@/app/_components/state/state-of";
import { type FigureOptions, formatCount, formatFigure } from "@/lib/domain/format/figure";
import { formatQuantity, type QuantityName, quantities } from "@/lib/domain/format/quantity";
import { formatDate, formatDateTime } from "@/lib/domain/format/time";

/** One row: JSON as a list of the API answers it, or as a page made it. */
export type Row = Record<string, unknown>;

/** How a cell shows its value. All of it is plain data, so that a server page can hand columns over. */
export type CellFormat =
  | { as: "text" }
  | { as: "code" }
  | ({ as: "figure" } & FigureOptions)
  | { as: "quantity"; name: QuantityName; digits?: number; sign?: "auto" | "always" }
  | { as: "count" }
  | { as: "time" }
  | { as: "date" }
  | { as: "state"; kind: StateKind }
  /** `true` and `false` in words. */
  | { as: "yes-no"; yes: string; no: string }
  /** Lower-case hex, cut short. */
  | { as: "digest" }
  /** `href` with `{path}` places filled from the row. */
  | { as: "link"; href: string };

export interface DataColumn {
  /** Path of the value in the row, with dots: `coefficients.gainTc`. */
  key: string;
  header: string;
  /** Under the heading; a `quantity` brings its own. */
  unit?: string;
  format?: CellFormat;
  /** Default: right for numbers, left for the rest. */
  align?: "left" | "right";
  /** Explains the heading on hover. */
  title?: string;
  /** Not shown until it is chosen. */
  hidden?: boolean;
  sortable?: boolean;
  /** Client pages only: draws the cell itself; sorting and CSV still use the value at `key`. */
  cell?: (row: Row) => ReactNode;
}

/** A chip that keeps the rows whose value at `key` is one of `in`, or above `above`. */
export interface FilterChip {
  id: string;
  name: string;
  key: string;
  in?: readonly (string | number | boolean | null)[];
  above?: number;
}

const numeric = new Set<CellFormat["as"]>(["figure", "quantity", "count"]);

/** The value at a dotted path; undefined where a step is missing. */
export function valueAt(row: Row, key: string): unknown {
  let value: unknown = row;
  for (const step of key.split(".")) {
    if (typeof value !== "object" || value === null) return undefined;
    value = (value as Row)[step];
  }
  return value;
}

export function isRight(column: DataColumn): boolean {
  return column.align ? column.align === "right" : numeric.has(column.format?.as ?? "text");
}

/** Figures, serials and digests are set in the face where no two signs look alike. */
export function isMono(column: DataColumn): boolean {
  const as = column.format?.as ?? "text";
  return as === "code" || as === "digest" || numeric.has(as);
}

export function unitOf(column: DataColumn): string | undefined {
  if (column.unit !== undefined) return column.unit;
  return column.format?.as === "quantity" ? quantities[column.format.name].unit : undefined;
}

/** The cell's text. What is missing is a dash for numbers and nothing for the rest. */
export function textOf(column: DataColumn, row: Row): string {
  const value = valueAt(row, column.key);
  const format = column.format ?? { as: "text" };
  const number = typeof value === "number" ? value : null;
  switch (format.as) {
    case "figure":
      return formatFigure(number, format);
    case "quantity":
      return formatQuantity(format.name, number, format);
    case "count":
      return formatCount(number);
    case "time":
      return formatDateTime(typeof value === "string" ? value : null);
    case "date":
      return formatDate(typeof value === "string" ? value : null);
    case "yes-no":
      return value === null || value === undefined ? "" : value ? format.yes : format.no;
    case "digest":
      return typeof value === "string" ? `${value.slice(0, 12)}…` : "";
    default:
      return plainText(value);
  }
}

function plainText(value: unknown): string {
  if (value === null || value === undefined) return "";
  if (Array.isArray(value)) return value.map(plainText).join(", ");
  return String(value);
}

/** An address whose `{path}` places are filled from the row; undefined where one of them is empty. */
export function hrefOf(template: string, row: Row): string | undefined {
  let complete = true;
  const href = template.replace(/\{([^}]+)\}/g, (_, key: string) => {
    const text = plainText(valueAt(row, key));
    if (!text) complete = false;
    return encodeURIComponent(text);
  });
  return complete ? href : undefined;
}

/** True where the row passes the chip. */
export function passes(chip: FilterChip, row: Row): boolean {
  const value = valueAt(row, chip.key);
  if (chip.above !== undefined) return typeof value === "number" && value > chip.above;
  return (chip.in ?? []).some((wanted) => wanted === (value ?? null));
}
