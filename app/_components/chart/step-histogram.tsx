"use client";

import { XAxis, YAxis } from "@/app/_components/chart/axes";
import { ChartFrame } from "@/app/_components/chart/chart-frame";
import { linearScale } from "@/app/_components/chart/scale";

export interface StepHistogramProps {
  label: string;
  /** Quantity and unit, as "gainTc, ppm/K". */
  xTitle: string;
  /** Lower edge of the first bin and width of each, in the unit of the axis. */
  from: number;
  width: number;
  counts: readonly number[];
  /** Decimals of an edge in the table. */
  digits: number;
}

/** How many devices change by how much: one bar a bin, zero marked where it is inside. */
export function StepHistogram({ label, xTitle, from, width, counts, digits }: StepHistogramProps) {
  const end = from + width * counts.length;
  return (
    <ChartFrame
      label={label}
      height={210}
      table={{
        name: label,
        columns: [
          { title: `from, ${xTitle}`, digits },
          { title: `to, ${xTitle}`, digits },
          { title: "devices", digits: 0 },
        ],
        rows: counts.map((count, bin) => [from + bin * width, from + (bin + 1) * width, count]),
      }}
    >
      {(area) => {
        const pad = counts.length < 3 ? width * 2 : 0;
        const x = linearScale([from - pad, end + pad], [area.left, area.right]);
        const y = linearScale([0, Math.max(1, ...counts) * 1.08], [area.bottom, area.top]);
        return (
          <>
            <YAxis area={area} scale={y} title="devices" whole />
            {counts.map((count, bin) =>
              count === 0 ? null : (
                <rect
                  // biome-ignore lint/suspicious/noArrayIndexKey: bins stand still
                  key={bin}
                  x={x(from + bin * width) + 0.5}
                  y={y(count)}
                  width={Math.max(1, x(width) - x(0) - 1)}
                  height={Math.max(1, area.bottom - y(count))}
                  className="fill-ink-soft"
                >
                  <title>{count}</title>
                </rect>
              ),
            )}
            {from < 0 && end > 0 ? (
              <line
                x1={x(0)}
                x2={x(0)}
                y1={area.top}
                y2={area.bottom}
                strokeDasharray="4 3"
                className="stroke-copper"
              />
            ) : null}
            <line x1={area.left} x2={area.right} y1={area.bottom} y2={area.bottom} className="stroke-rule" />
            <XAxis area={area} scale={x} title={xTitle} />
          </>
        );
      }}
    </ChartFrame>
  );
}
