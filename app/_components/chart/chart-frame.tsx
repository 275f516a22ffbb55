"use client";

import { type ReactNode, useEffect, useRef, useState } from "react";
import { type ChartTable, ChartTableDetails } from "@/app/_components/chart/chart-table";

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
        <svg
          viewBox={`0 0 ${width} ${height}`}
          width={width}
          height={height}
          role="img"
          aria-label={label}
          className="block text-[13px] print:h-auto print:w-full"
        >
          {children(area)}
        </svg>
      </div>
      {legend}
      <ChartTableDetails table={table} />
    </figure>
  );
}
