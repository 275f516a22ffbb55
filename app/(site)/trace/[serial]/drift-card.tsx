"use client";

import { Card } from "@/app/_components/card";
import { LineChart } from "@/app/_components/chart/line-chart";
import { LegalNote } from "@/app/_components/legal-note";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";

type Curves = NonNullable<DerivedDeviceDetail["curves"]>;
type Curve = Curves["spanPpm"];

/** The device's own drift as measured, before and after compensation by the decoded values. */
export function DriftCard({ curves }: { curves: Curves }) {
  // A single point is the one that the gain was taken from: it says nothing.
  const loaded = curves.spanPpm.after.length > 1;
  return (
    <Card title="Drift, before and after" note="from its own readings">
      <div className={`grid grid-cols-1 gap-5 ${loaded ? "xl:grid-cols-2" : ""}`}>
        <LineChart
          label="Drift of the unloaded output before and after compensation"
          xTitle="chamber, °C"
          yTitle="unloaded output, intervals (v)"
          height={240}
          series={seriesOf(curves.zeroIntervals)}
        />
        {loaded ? (
          <LineChart
            label="Span error before and after compensation"
            xTitle="chamber, °C"
            yTitle="span error, ppm"
            yDigits={1}
            height={240}
            series={seriesOf(curves.spanPpm)}
          />
        ) : null}
      </div>
      <div className="mt-3">
        <LegalNote />
      </div>
    </Card>
  );
}

function seriesOf({ before, after }: Curve) {
  const points = (values: Curve["before"]) => values.map(({ chamberC, value }) => [chamberC, value] as const);
  return [
    { name: "before", tone: "ink" as const, dashed: true, draw: "both" as const, points: points(before) },
    { name: "after", tone: "copper" as const, draw: "both" as const, points: points(after) },
  ];
}
