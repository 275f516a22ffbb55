"use client";

import { useState } from "react";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { saveCsv } from "@/app/_components/table/csv";
import { formatCount, formatFigure } from "@/lib/domain/format/figure";

export interface ChartColumn {
  /** With its unit. */
  title: string;
  /** Decimals of its numbers on the screen; the file has all of them. */
  digits?: number;
}

export type ChartCell = string | number | null;

export interface ChartTable {
  /** What the file is called. */
  name: string;
  columns: readonly ChartColumn[];
  rows: readonly (readonly ChartCell[])[];
}

/** More rows than this are read in the file. */
const SHOWN_MAX = 500;

/** The data of a chart, opened below it, and as a file. */
export function ChartTableDetails({ table }: { table: ChartTable }) {
  const [open, setOpen] = useState(false);
  return (
    <details
      className="mt-1.5 text-sm print:hidden"
      onToggle={(event) => setOpen(event.currentTarget.open)}
      data-chart-table
    >
      <summary className="w-max text-slate hover:text-copper-strong">Values as a table</summary>
      {open ? <Opened table={table} /> : null}
    </details>
  );
}

function Opened({ table }: { table: ChartTable }) {
  const { columns, rows } = table;
  return (
    <>
      <p className="mt-1 flex flex-wrap items-center gap-3 text-xs text-ink-soft">
        {rows.length > SHOWN_MAX
          ? `The first ${SHOWN_MAX} of ${formatCount(rows.length)} rows`
          : `${formatCount(rows.length)} rows`}
        <button
          type="button"
          className="text-slate underline hover:text-copper-strong"
          onClick={() => saveCsv(table.name.replaceAll(/[^\w-]+/g, "-"), csvOf(table))}
        >
          Save as CSV
        </button>
      </p>
      <ScrollRegion
        label={`Values: ${table.name.replaceAll("-", " ")}`}
        className="mt-2 max-h-80 overflow-auto border border-rule"
      >
        <table className="w-full">
          <thead>
            <tr>
              {columns.map(({ title, digits }) => (
                <th
                  key={title}
                  scope="col"
                  className={`sticky top-0 border-b border-rule bg-raised px-3 py-1.5 text-xs text-ink-soft ${digits === undefined ? "text-left" : "text-right"}`}
                >
                  {title}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {rows.slice(0, SHOWN_MAX).map((row, index) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: rows of a chart have no identity of their own
              <tr key={index} className="border-b border-rule/55">
                {row.map((cell, column) => (
                  <td
                    // biome-ignore lint/suspicious/noArrayIndexKey: columns are fixed
                    key={column}
                    className={`px-3 py-1 font-mono whitespace-nowrap ${columns[column]?.digits === undefined ? "" : "text-right"}`}
                  >
                    {shown(cell, columns[column]?.digits)}
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </ScrollRegion>
    </>
  );
}

function shown(cell: ChartCell, digits: number | undefined): string {
  return typeof cell === "string" ? cell : formatFigure(cell, { digits: digits ?? 2 });
}

/** Numbers in full (RFC 4180). Texts are serials and words of ours. */
function csvOf({ columns, rows }: ChartTable): string {
  const quote = (text: string) => (/[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text);
  const lines = [columns.map(({ title }) => title), ...rows.map((row) => row.map((cell) => cell ?? ""))];
  return lines.map((cells) => `${cells.map((cell) => quote(String(cell))).join(",")}\r\n`).join("");
}
