import { readFileSync } from "node:fs";
import { join } from "node:path";

/** A table of tests/fixtures/published: its `# name: value` lines and its rows by column name. */
export interface PublishedTable {
  /** What the comment lines say, joined. */
  notes: string;
  rows: Record<string, number>[];
}

/** Reads one published table. */
export function readPublished(name: string): PublishedTable {
  const lines = readFileSync(join(import.meta.dirname, "../../fixtures/published", name), "utf8")
    .trim()
    .split("\n");
  const notes = lines.filter((line) => line.startsWith("#")).join("\n");
  const [header, ...body] = lines.filter((line) => !line.startsWith("#"));
  const columns = (header ?? "").split(",");
  const rows = body.map((line) => {
    const cells = line.split(",");
    return Object.fromEntries(columns.map((column, i) => [column, Number(cells[i])]));
  });
  return { notes, rows };
}

/** One column of a table. */
export function column(table: PublishedTable, name: string): number[] {
  return table.rows.map((row) => row[name] as number);
}

/** Number of significant digits in which two numbers agree: −log10 of the relative difference, at most 16. */
export function agreeingDigits(actual: number, certified: number): number {
  if (actual === certified) return 16;
  return -Math.log10(Math.abs(actual - certified) / Math.abs(certified));
}
