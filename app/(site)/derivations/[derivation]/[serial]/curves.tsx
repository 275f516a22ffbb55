import { Card } from "@/app/_components/card";
import { LineChart } from "@/app/_components/chart/line-chart";
import { spanErrorLimit } from "@/lib/domain/compensation/envelope";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";

type DeviceCurves = NonNullable<DerivedDeviceDetail["curves"]>;
type Curve = DeviceCurves["spanPpm"];

function seriesOf({ before, after }: Curve) {
  const points = (values: Curve["before"]) => values.map(({ chamberC, value }) => [chamberC, value] as const);
  return [
    { name: "before", tone: "ink" as const, dashed: true, draw: "both" as const, points: points(before) },
    { name: "after", tone: "copper" as const, draw: "both" as const, points: points(after) },
  ];
}

/** What the device's own readings show before and after compensation. */
export function Curves({ curves, rules }: { curves: DeviceCurves; rules: FamilyRules }) {
  const limit = spanErrorLimit(rules) * 1e6;
  return (
    <div className="grid gap-[18px] xl:grid-cols-2">
      <Card title="Zero against temperature, before and after">
        <LineChart
          label="Drift of the unloaded output before and after compensation"
          xTitle="chamber, °C"
          yTitle="unloaded output, intervals (v)"
          series={seriesOf(curves.zeroIntervals)}
        />
      </Card>
      <Card title="Gain against temperature, before and after">
        {curves.spanPpm.after.length > 0 ? (
          <LineChart
            label="Span error before and after compensation"
            xTitle="chamber, °C"
            yTitle="span error, ppm"
            yDigits={1}
            series={seriesOf(curves.spanPpm)}
            band={{ name: "inside the envelope at every load", from: -limit, to: limit }}
          />
        ) : (
          <p className="py-8 text-sm text-ink-soft">The device was never loaded: nothing is said on its span.</p>
        )}
      </Card>
    </div>
  );
}
