import { type DataColumn, type Row, unitOf, valueAt } from "@/app/_components/table/column";

/**
 * The rows as CSV (RFC 4180) with the stored values at full precision, not the rounded ones of the screen.
 * A text that a spreadsheet would run as a formula gets an apostrophe in front.
 */
export function csvOf(columns: readonly DataColumn[], rows: readonly Row[]): string {
  const header = columns.map((column) => quote(headerOf(column)));
  const lines = rows.map((row) => columns.map((column) => quote(stored(valueAt(row, column.key)))));
  return `${[header, ...lines].map((cells) => cells.join(",")).join("\r\n")}\r\n`;
}

/** Stored values are in stored units, so only a column's own unit is named. */
function headerOf(column: DataColumn): string {
  const unit = column.format?.as === "quantity" ? undefined : unitOf(column);
  return unit ? `${column.key} (${unit})` : column.key;
}

function stored(value: unknown): string {
  if (value === null || value === undefined) return "";
  if (typeof value === "number" || typeof value === "boolean") return String(value);
  const text = typeof value === "string" ? value : JSON.stringify(value);
  return /^[=+\-@\t\r]/.test(text) ? `'${text}` : text;
}

function quote(text: string): string {
  return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}

/** Hands the text to the browser as a file. */
export function saveCsv(name: string, csv: string): void {
  const url = URL.createObjectURL(new Blob([csv], { type: "text/csv;charset=utf-8" }));
  const link = document.createElement("a");
  link.href = url;
  link.download = `${name}.csv`;
  link.click();
  setTimeout(() => URL.revokeObjectURL(url), 10_000);
}
