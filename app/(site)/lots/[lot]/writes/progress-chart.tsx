"use client";

import { LineChart, type LineSeries } from "@/app/_components/chart/line-chart";
import { formatDateTime } from "@/lib/domain/format/time";
import type { ProgressPoint, WriteProgress } from "@/lib/services/stations/get-write-progress";

const hourMs = 3_600_000;
/** Beyond three days, days are easier to read than hours. */
const hoursMax = 72;

/** Devices verified over time: with any package, and with the live one. */
export function ProgressChart({ progress }: { progress: WriteProgress }) {
  const { anyPackage, livePackage, live } = progress;
  const start = new Date(anyPackage[0]?.at ?? 0).getTime();
  const end = Math.max(...[anyPackage, livePackage].map((curve) => new Date(curve.at(-1)?.at ?? 0).getTime()));
  const inDays = end - start > hoursMax * hourMs;
  const unitMs = inDays ? 24 * hourMs : hourMs;
  const x = (at: number) => (at - start) / unitMs;
  // A curve that ends early stays where it is, up to the newest write.
  const points = (curve: readonly ProgressPoint[]) => [
    ...curve.map(({ at, devices }) => [x(new Date(at).getTime()), devices] as const),
    [x(end), curve.at(-1)?.devices ?? 0] as const,
  ];
  const onlyLive =
    live !== null && livePackage.length === anyPackage.length && livePackage[0]?.at === anyPackage[0]?.at;
  const series: LineSeries[] = [
    ...(onlyLive ? [] : [{ name: "with any release", tone: "ink" as const, dashed: true, points: points(anyPackage) }]),
    ...(live && livePackage.length > 0
      ? [{ name: `with ${live.version}, live`, tone: "verdigris" as const, points: points(livePackage) }]
      : []),
  ];
  return (
    <LineChart
      label={`Devices verified over time, ${anyPackage.at(-1)?.devices ?? 0} in all`}
      xTitle={`${inDays ? "days" : "hours"} since ${formatDateTime(anyPackage[0]?.at)}`}
      yTitle="devices"
      yDigits={0}
      series={series}
      height={250}
    />
  );
}
