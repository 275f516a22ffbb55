"use client";

import { XAxis, YAxis } from "@/app/_components/chart/axes";
import { ChartFrame } from "@/app/_components/chart/chart-frame";
import type { ChartTable } from "@/app/_components/chart/chart-table";
import { Legend, strokeOf } from "@/app/_components/chart/legend";
import { linearScale, type Scale } from "@/app/_components/chart/scale";

export interface EnvelopeLine {
  /** Serial. */
  name: string;
  role: "sample" | "verification" | "zero";
  /** Load and error, both in verification intervals, in rising order of load. */
  points: readonly (readonly [load: number, error: number])[];
}

export interface EnvelopeStep {
  /** Last load of the step, in intervals. */
  upTo: number;
  /** Largest error allowed in it, ±, in intervals. */
  limit: number;
}

export interface EnvelopeChartProps {
  label: string;
  /** Class, intervals and share, as "class C, 3,000 intervals, p_LC 0.7". */
  envelopeName: string;
  /** In rising order; the last ends at the number of intervals. */
  steps: readonly EnvelopeStep[];
  lines: readonly EnvelopeLine[];
  height?: number;
}

const looks = {
  sample: { tone: "ink", name: "sample" },
  zero: { tone: "slate", name: "zero-only" },
  verification: { tone: "copper", name: "verification" },
} as const;

/** Span error against load inside the stepped envelope of the class. Stands with a `LegalNote`. */
export function EnvelopeChart({ label, envelopeName, steps, lines, height }: EnvelopeChartProps) {
  const intervals = steps.at(-1)?.upTo ?? 0;
  const errors = lines.flatMap((line) => line.points.map(([, error]) => Math.abs(error)));
  const reach = Math.max(...steps.map((step) => step.limit), ...errors, 0) * 1.1 || 1;
  const roles = (["sample", "zero", "verification"] as const)
    .map((role) => ({ role, count: lines.filter((line) => line.role === role).length }))
    .filter(({ count }) => count > 0);

  return (
    <ChartFrame
      label={label}
      height={height}
      table={tableOf(label, lines, steps)}
      legend={
        <Legend
          entries={[
            { name: envelopeName, tone: "verdigris", shape: "band" },
            ...roles.map(({ role, count }) => ({
              name: `${looks[role].name} ${count}`,
              tone: looks[role].tone,
              shape: "line" as const,
            })),
          ]}
        />
      }
    >
      {(area) => {
        const x = linearScale([0, intervals], [area.left, area.right]);
        const y = linearScale([-reach, reach], [area.bottom, area.top]);
        return (
          <>
            <YAxis area={area} scale={y} title="error, intervals (v)" />
            <XAxis area={area} scale={x} title="load, intervals (v)" ticks={loadTicks(steps, x)} />
            <polygon points={outline(steps, x, y)} fillOpacity="0.12" className="fill-verdigris stroke-verdigris" />
            {lines.map((line) => (
              <polyline
                key={line.name}
                points={line.points.map(([load, error]) => `${x(load)},${y(error)}`).join(" ")}
                fill="none"
                strokeWidth="1.3"
                opacity="0.75"
                className={strokeOf[looks[line.role].tone]}
              >
                <title>{line.name}</title>
              </polyline>
            ))}
          </>
        );
      }}
    </ChartFrame>
  );
}

/** Ends of the steps, without those too close to the one before. */
function loadTicks(steps: readonly EnvelopeStep[], x: Scale): number[] {
  return [0, ...steps.map((step) => step.upTo)].filter((load, i, all) => {
    const next = all[i + 1];
    return next === undefined || x(next) - x(load) > 44;
  });
}

function outline(steps: readonly EnvelopeStep[], x: Scale, y: Scale): string {
  const starts = [0, ...steps.map((step) => step.upTo)];
  const upper = steps.flatMap((step, i): [number, number][] => [
    [starts[i] ?? 0, step.limit],
    [step.upTo, step.limit],
  ]);
  const lower = upper.map(([load, limit]): [number, number] => [load, -limit]).reverse();
  return [...upper, ...lower].map(([load, limit]) => `${x(load)},${y(limit)}`).join(" ");
}

function tableOf(label: string, lines: readonly EnvelopeLine[], steps: readonly EnvelopeStep[]): ChartTable {
  const limitAt = (load: number) => steps.find((step) => load <= step.upTo)?.limit ?? null;
  const rows = lines.flatMap((line) =>
    line.points.map(([load, error]) => [line.name, looks[line.role].name, load, error, limitAt(load)]),
  );
  const columns = [
    { title: "Serial" },
    { title: "Role" },
    { title: "Load, v", digits: 0 },
    { title: "Error, v", digits: 3 },
    { title: "Limit ±, v", digits: 3 },
  ];
  return { name: label, columns, rows };
}
