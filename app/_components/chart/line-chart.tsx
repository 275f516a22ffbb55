"use client";

import { XAxis, YAxis } from "@/app/_components/chart/axes";
import { ChartFrame } from "@/app/_components/chart/chart-frame";
import type { ChartTable } from "@/app/_components/chart/chart-table";
import { fillOf, Legend, type SeriesTone, strokeOf } from "@/app/_components/chart/legend";
import { domainOf, linearScale, type Scale } from "@/app/_components/chart/scale";

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

/** What many devices span together, from lowest to highest. */
export interface LineRange {
  name: string;
  tone: SeriesTone;
  points: readonly (readonly [x: number, low: number, high: number])[];
}

export interface LineChartProps {
  label: string;
  /** Quantity and unit. */
  xTitle: string;
  yTitle: string;
  series: readonly LineSeries[];
  ranges?: readonly LineRange[];
  /** Allowed range of y. */
  band?: { name: string; from: number; to: number };
  xDigits?: number;
  yDigits?: number;
  /** Only whole numbers are named on the axis. */
  xWhole?: boolean;
  height?: number;
  /** Instead of one row a point. */
  table?: ChartTable;
}

/** Any y over x: zero and gain over temperature before and after, residuals, progress over time. */
export function LineChart(props: LineChartProps) {
  const { label, xTitle, yTitle, series, ranges = [], band, height } = props;
  const xs = [...series.flatMap((s) => s.points.map(([x]) => x)), ...ranges.flatMap((r) => r.points.map(([x]) => x))];
  const ys = [
    ...series.flatMap((s) => s.points.map(([, y]) => y)),
    ...ranges.flatMap((r) => r.points.flatMap(([, low, high]) => [low, high])),
    ...(band ? [band.from, band.to] : []),
  ];
  return (
    <ChartFrame
      label={label}
      height={height}
      table={props.table ?? tableOf(props)}
      legend={<Legend entries={legendOf(series, ranges, band)} />}
    >
      {(area) => {
        const x = linearScale(domainOf(xs, 0.03), [area.left, area.right]);
        const y = linearScale(domainOf(ys), [area.bottom, area.top]);
        return (
          <>
            <YAxis area={area} scale={y} title={yTitle} />
            <XAxis area={area} scale={x} title={xTitle} whole={props.xWhole} />
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
            {ranges.map((range) => (
              <RangeArea key={range.name} range={range} x={x} y={y} />
            ))}
            {series.map((s) => (
              <SeriesLine key={`${s.group ?? ""} ${s.name}`} series={s} x={x} y={y} />
            ))}
          </>
        );
      }}
    </ChartFrame>
  );
}

function SeriesLine({ series: s, x, y }: { series: LineSeries; x: Scale; y: Scale }) {
  return (
    <g>
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
        ? s.points.map(([px, py], index) => (
            // biome-ignore lint/suspicious/noArrayIndexKey: points of a series have no identity of their own
            <circle key={index} cx={x(px)} cy={y(py)} r="3" className={fillOf[s.tone]} />
          ))
        : null}
    </g>
  );
}

function RangeArea({ range, x, y }: { range: LineRange; x: Scale; y: Scale }) {
  const upper = range.points.map(([px, , high]) => `${x(px)},${y(high)}`);
  const lower = range.points.map(([px, low]) => `${x(px)},${y(low)}`).reverse();
  return (
    <polygon points={[...upper, ...lower].join(" ")} fillOpacity="0.14" className={fillOf[range.tone]}>
      <title>{range.name}</title>
    </polygon>
  );
}

function tableOf({ label, xTitle, yTitle, series, xDigits = 2, yDigits = 3 }: LineChartProps): ChartTable {
  return {
    name: label,
    columns: [{ title: "Series" }, { title: xTitle, digits: xDigits }, { title: yTitle, digits: yDigits }],
    rows: series.flatMap((s) => s.points.map(([x, y]) => [s.name, x, y])),
  };
}

function legendOf(series: readonly LineSeries[], ranges: readonly LineRange[], band: LineChartProps["band"]) {
  const named = new Map(series.map((s) => [s.group ?? s.name, s] as const));
  const entries = [...named].map(([name, s]) => ({
    name,
    tone: s.tone,
    shape: s.draw === "points" ? ("dot" as const) : s.dashed ? ("dashed" as const) : ("line" as const),
  }));
  return [
    ...entries,
    ...ranges.map(({ name, tone }) => ({ name, tone, shape: "area" as const })),
    ...(band ? [{ name: band.name, tone: "verdigris" as const, shape: "band" as const }] : []),
  ];
}
