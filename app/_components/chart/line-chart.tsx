"use client";

import { XAxis, YAxis } from "@/app/_components/chart/axes";
import { ChartFrame } from "@/app/_components/chart/chart-frame";
import { fillOf, Legend, type SeriesTone, strokeOf } from "@/app/_components/chart/legend";
import { domainOf, linearScale } from "@/app/_components/chart/scale";
import { formatFigure } from "@/lib/domain/format/figure";

export interface LineSeries {
  name: string;
  tone: SeriesTone;
  points: readonly (readonly [x: number, y: number])[];
  dashed?: boolean;
  /** line, only the measured points, or both. */
  draw?: "line" | "points" | "both";
  /** Series of one group share a legend entry: the group's name. */
  group?: string;
}

export interface LineChartProps {
  label: string;
  /** Quantity and unit. */
  xTitle: string;
  yTitle: string;
  series: readonly LineSeries[];
  /** Allowed range of y. */
  band?: { name: string; from: number; to: number };
  xDigits?: number;
  yDigits?: number;
  height?: number;
}

/** Any y over x: zero and gain over temperature before and after, residuals, progress over time. */
export function LineChart({ label, xTitle, yTitle, series, band, xDigits = 2, yDigits = 3, height }: LineChartProps) {
  const xs = series.flatMap((s) => s.points.map(([x]) => x));
  const ys = [...series.flatMap((s) => s.points.map(([, y]) => y)), ...(band ? [band.from, band.to] : [])];
  const rows = series.flatMap((s) =>
    s.points.map(([x, y]) => [s.name, formatFigure(x, { digits: xDigits }), formatFigure(y, { digits: yDigits })]),
  );
  return (
    <ChartFrame
      label={label}
      height={height}
      table={{ columns: ["Series", xTitle, yTitle], rows }}
      legend={<Legend entries={legendOf(series, band)} />}
    >
      {(area) => {
        const x = linearScale(domainOf(xs, 0.03), [area.left, area.right]);
        const y = linearScale(domainOf(ys), [area.bottom, area.top]);
        return (
          <>
            <YAxis area={area} scale={y} title={yTitle} />
            <XAxis area={area} scale={x} title={xTitle} />
            {band ? (
              <rect
                x={area.left}
                y={y(band.to)}
                width={area.right - area.left}
                height={Math.max(0, y(band.from) - y(band.to))}
                fillOpacity="0.12"
                className="fill-verdigris stroke-verdigris"
              />
            ) : null}
            {series.map((s) => (
              <g key={s.name}>
                <title>{s.name}</title>
                {s.draw === "points" ? null : (
                  <polyline
                    points={s.points.map(([px, py]) => `${x(px)},${y(py)}`).join(" ")}
                    fill="none"
                    strokeWidth="1.4"
                    strokeDasharray={s.dashed ? "4 3" : undefined}
                    opacity="0.85"
                    className={strokeOf[s.tone]}
                  />
                )}
                {s.draw === "points" || s.draw === "both"
                  ? s.points.map(([px, py]) => (
                      <circle key={`${px},${py}`} cx={x(px)} cy={y(py)} r="3" className={fillOf[s.tone]} />
                    ))
                  : null}
              </g>
            ))}
          </>
        );
      }}
    </ChartFrame>
  );
}

function legendOf(series: readonly LineSeries[], band: LineChartProps["band"]) {
  const named = new Map(series.map((s) => [s.group ?? s.name, s] as const));
  const entries = [...named].map(([name, s]) => ({
    name,
    tone: s.tone,
    shape: s.draw === "points" ? ("dot" as const) : s.dashed ? ("dashed" as const) : ("line" as const),
  }));
  return band ? [...entries, { name: band.name, tone: "verdigris" as const, shape: "band" as const }] : entries;
}
