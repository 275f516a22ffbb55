"use client";

import { type ReactNode, useEffect, useRef, useState } from "react";
import { ScrollRegion } from "@/app/_components/scroll-region";

export interface ChartTable {
  /** Headings with their units. */
  columns: readonly string[];
  /** Formatted cells; the first is the row's heading. */
  rows: readonly (readonly string[])[];
}

export interface PlotArea {
  width: number;
  height: number;
  left: number;
  right: number;
  top: number;
  bottom: number;
}

export interface ChartFrameProps {
  /** What the chart shows and its main result in one sentence, for those who don't see it. */
  label: string;
  table: ChartTable;
  height?: number;
  /** Under the chart: names of what is drawn. */
  legend?: ReactNode;
  children: (area: PlotArea) => ReactNode;
}

/** Draws at the width there is, so that text keeps its size; the data stand in a table that can be opened. */
export function ChartFrame({ label, table, height = 290, legend, children }: ChartFrameProps) {
  const box = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(660);
  useEffect(() => {
    if (!box.current) return;
    const observer = new ResizeObserver(([entry]) => entry && setWidth(Math.max(280, entry.contentRect.width)));
    observer.observe(box.current);
    return () => observer.disconnect();
  }, []);
  const area = { width, height, left: 54, right: width - 22, top: 26, bottom: height - 46 };

  return (
    <figure className="m-0">
      <div ref={box} className="overflow-hidden">
        <svg width={width} height={height} role="img" aria-label={label} className="block text-[13px]">
          {children(area)}
        </svg>
      </div>
      {legend}
      <details className="mt-1.5 text-sm print:hidden">
        <summary className="w-max text-slate hover:text-copper-strong">Values as a table</summary>
        <ScrollRegion label="Values as a table" className="mt-2 max-h-80 overflow-auto border border-rule">
          <table className="w-full">
            <thead>
              <tr>
                {table.columns.map((column, index) => (
                  <th
                    key={column}
                    scope="col"
                    className={`sticky top-0 border-b border-rule bg-raised px-3 py-1.5 text-xs text-ink-soft ${index ? "text-right" : "text-left"}`}
                  >
                    {column}
                  </th>
                ))}
              </tr>
            </thead>
            <tbody>
              {table.rows.map((row, index) => (
                // biome-ignore lint/suspicious/noArrayIndexKey: rows of a chart have no identity of their own
                <tr key={index} className="border-b border-rule/55">
                  {row.map((text, column) => (
                    <td
                      // biome-ignore lint/suspicious/noArrayIndexKey: columns are fixed
                      key={column}
                      className={`px-3 py-1 font-mono whitespace-nowrap ${column ? "text-right" : ""}`}
                    >
                      {text}
                    </td>
                  ))}
                </tr>
              ))}
            </tbody>
          </table>
        </ScrollRegion>
      </details>
    </figure>
  );
}
