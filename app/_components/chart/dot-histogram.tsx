"use client";

import { XAxis } from "@/app/_components/chart/axes";
import { ChartFrame, type PlotArea } from "@/app/_components/chart/chart-frame";
import { Legend, type LegendEntry } from "@/app/_components/chart/legend";
import { domainOf, linearScale, type Scale } from "@/app/_components/chart/scale";
import { formatFigure } from "@/lib/domain/format/figure";

export interface HistogramValue {
  /** Serial. */
  name: string;
  /** In the unit of the axis. */
  value: number;
  role: "sample" | "verification" | "excluded";
}

export interface DotHistogramProps {
  label: string;
  /** Quantity and unit, as "gainTc, ppm/K". */
  xTitle: string;
  values: readonly HistogramValue[];
  mean: number | null;
  /** Tolerance interval; null where the sample is too small for one. */
  tolerance: readonly [number, number] | null;
  /** Share and confidence, as "95/95 tolerance". */
  toleranceName?: string;
  /** What the tolerance interval has to lie in. */
  limit: readonly [number, number] | null;
  digits?: number;
  height?: number;
}

/** One dot a device, stacked where they would cover each other, with mean, tolerance interval and limits. */
export function DotHistogram(props: DotHistogramProps) {
  const { label, xTitle, values, mean, tolerance, toleranceName = "tolerance interval", limit, digits = 2 } = props;
  const all = [...values.map((v) => v.value), ...(tolerance ?? []), ...(limit ?? []), ...(mean === null ? [] : [mean])];
  return (
    <ChartFrame
      label={label}
      height={props.height}
      table={{
        name: label,
        columns: [{ title: "Serial" }, { title: "Role" }, { title: xTitle, digits }],
        rows: values.map((v) => [v.name, v.role, v.value]),
      }}
      legend={<Legend entries={entriesOf(props, toleranceName, digits)} />}
    >
      {(area) => {
        const x = linearScale(domainOf(all), [area.left, area.right]);
        return (
          <>
            {limit ? (
              <rect
                x={x(limit[0])}
                y={area.top}
                width={Math.max(0, x(limit[1]) - x(limit[0]))}
                height={area.bottom - area.top}
                fillOpacity="0.12"
                className="fill-verdigris stroke-verdigris"
              />
            ) : null}
            <line x1={area.left} x2={area.right} y1={area.bottom} y2={area.bottom} className="stroke-rule" />
            <XAxis area={area} scale={x} title={xTitle} />
            {mean === null ? null : (
              <line
                x1={x(mean)}
                x2={x(mean)}
                y1={area.top + 14}
                y2={area.bottom}
                strokeWidth="1.4"
                strokeDasharray="4 3"
                className="stroke-copper"
              />
            )}
            {tolerance ? <ToleranceBar x={x} y={area.top + 34} tolerance={tolerance} /> : null}
            <Dots values={values} x={x} area={area} />
          </>
        );
      }}
    </ChartFrame>
  );
}

function ToleranceBar({ x, y, tolerance }: { x: Scale; y: number; tolerance: readonly [number, number] }) {
  const [from, to] = [x(tolerance[0]), x(tolerance[1])];
  const d = `M${from},${y} H${to} M${from},${y - 10} V${y + 10} M${to},${y - 10} V${y + 10}`;
  return <path d={d} fill="none" strokeWidth="1.8" className="stroke-copper" />;
}

function Dots({ values, x, area }: { values: readonly HistogramValue[]; x: Scale; area: PlotArea }) {
  const radius = values.length > 80 ? 3.2 : 5;
  return stackDots(values, x, radius).map(({ value, cx, level }) => (
    <circle
      key={value.name}
      cx={cx}
      cy={Math.max(area.top + 50, area.bottom - radius - 6 - level * (radius * 2 + 4))}
      r={radius}
      strokeWidth="1.6"
      strokeDasharray={value.role === "excluded" ? "2 2" : undefined}
      className={dotLook[value.role]}
    >
      <title>{value.name}</title>
    </circle>
  ));
}

const dotLook = {
  sample: "fill-ink stroke-ink",
  verification: "fill-raised stroke-copper",
  excluded: "fill-raised stroke-ink-soft",
};

/** Each dot at its own place; one level higher for every dot that it would cover. */
function stackDots(values: readonly HistogramValue[], x: Scale, radius: number) {
  const levels: number[] = [];
  return [...values]
    .sort((a, b) => a.value - b.value)
    .map((value) => {
      const cx = x(value.value);
      const free = levels.findIndex((last) => cx - last >= radius * 2 + 1);
      const level = free === -1 ? levels.length : free;
      levels[level] = cx;
      return { value, cx, level };
    });
}

function entriesOf(props: DotHistogramProps, toleranceName: string, digits: number): LegendEntry[] {
  const { values, mean, tolerance, limit } = props;
  const count = (role: HistogramValue["role"]) => values.filter((v) => v.role === role).length;
  const halfOf = (range: readonly [number, number]) => formatFigure((range[1] - range[0]) / 2, { digits });
  const entries: (LegendEntry | null)[] = [
    count("sample") ? { name: `sample ${count("sample")}`, tone: "ink", shape: "dot" } : null,
    count("verification") ? { name: `verification ${count("verification")}`, tone: "copper", shape: "ring" } : null,
    count("excluded") ? { name: `excluded ${count("excluded")}`, tone: "ink", shape: "ring" } : null,
    mean === null ? null : { name: `mean ${formatFigure(mean, { digits })}`, tone: "copper", shape: "dashed" },
    tolerance ? { name: `${toleranceName} ±${halfOf(tolerance)}`, tone: "copper", shape: "bar" } : null,
    limit ? { name: `limit ±${halfOf(limit)}`, tone: "verdigris", shape: "band" } : null,
  ];
  return entries.filter((entry) => entry !== null);
}
