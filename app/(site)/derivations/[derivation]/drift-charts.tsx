import { Card } from "@/app/_components/card";
import type { ChartTable } from "@/app/_components/chart/chart-table";
import { LineChart, type LineRange, type LineSeries } from "@/app/_components/chart/line-chart";
import { spanErrorLimit } from "@/lib/domain/compensation/envelope";
import type { DriftCurves } from "@/lib/domain/compensation/predict";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import type { ChartDevice, DerivationChart, GatheredDrift } from "@/lib/services/derivations/get-derivation-chart";
import { drawnNote } from "./charts";

type Part = keyof DriftCurves;
type Drawn = ChartDevice & { curves: DriftCurves };

const NOTHING_LOADED = "No device was loaded at two temperatures or more: nothing is said on the span.";

/** Drift of zero and of span over chamber temperature, as measured and compensated. */
export function DriftCharts({ chart }: { chart: DerivationChart }) {
  const devices = chart.devices.filter((device): device is Drawn => device.curves !== null);
  const note = drawnNote(chart);
  // One loaded point is the one that the gain was taken from: it says nothing on drift.
  const loaded = devices.filter(({ curves }) => curves.spanPpm.after.length > 1);
  const limit = spanErrorLimit(chart.rules) * 1e6;
  return (
    <div className="grid gap-[18px] xl:grid-cols-2">
      <Card title="Zero against temperature, before and after" note={note}>
        <LineChart
          label={`Unloaded output over chamber temperature, before and after compensation, ${formatNumberOf(devices.length, "device")} drawn`}
          xTitle="chamber, °C"
          yTitle="unloaded output, intervals (v)"
          series={seriesOf(devices, "zeroIntervals")}
          ranges={chart.gathered ? rangesOf(chart.gathered) : []}
          table={tableOf("zero-against-temperature", devices, "zeroIntervals", "v", 3)}
        />
        <p className="mt-1.5 text-xs text-ink-soft">
          Before: change against the point nearest the reference, as an untrimmed device has no other origin.
          {chart.gathered ? ` ${gatheredText(chart.gathered)}` : ""}
        </p>
      </Card>
      <Card title="Gain against temperature, before and after" note={note}>
        {loaded.length === 0 ? (
          <p className="py-8 text-sm text-ink-soft">{NOTHING_LOADED}</p>
        ) : (
          <>
            <LineChart
              label={`Span error over chamber temperature, before and after compensation, ${formatNumberOf(loaded.length, "device")} drawn`}
              xTitle="chamber, °C"
              yTitle="span error, ppm"
              yDigits={1}
              series={seriesOf(loaded, "spanPpm")}
              band={{ name: "inside the envelope at every load", from: -limit, to: limit }}
              table={tableOf("gain-against-temperature", loaded, "spanPpm", "ppm", 1)}
            />
            <p className="mt-1.5 text-xs text-ink-soft">
              Before: against the loaded point nearest the reference. gainTc, the correction, is opposite in sign to
              this drift.
            </p>
          </>
        )}
      </Card>
    </div>
  );
}

function gatheredText({ devices, others }: GatheredDrift): string {
  const rest = others > 0 ? `; ${formatCount(others)} read at other points are left out` : "";
  return `The other ${formatNumberOf(devices, "device")} are drawn as the range they span${rest}.`;
}

function seriesOf(devices: readonly Drawn[], part: Part): LineSeries[] {
  const line = (device: Drawn, side: "before" | "after"): LineSeries => {
    const isVerification = device.role === "verification";
    const tone = side === "before" ? "ink" : isVerification ? "slate" : "copper";
    return {
      name: `${device.serial} ${side}`,
      group: side === "before" ? "before" : `after, ${isVerification ? "verification" : "sample"}`,
      tone,
      dashed: side === "before",
      draw: "line",
      points: device.curves[part][side].map(({ chamberC, value }) => [chamberC, value] as const),
    };
  };
  return [...devices.map((device) => line(device, "before")), ...devices.map((device) => line(device, "after"))];
}

function rangesOf({ devices, zeroIntervals }: GatheredDrift): LineRange[] {
  const range = (side: "before" | "after", tone: LineRange["tone"]): LineRange => ({
    name: `range of ${formatCount(devices)} more, ${side}`,
    tone,
    points: zeroIntervals.map((one) => [one.chamberC, ...one[side]] as const),
  });
  return [range("before", "ink"), range("after", "copper")];
}

function tableOf(name: string, devices: readonly Drawn[], part: Part, unit: string, digits: number): ChartTable {
  return {
    name,
    columns: [
      { title: "Serial" },
      { title: "Role" },
      { title: "Chamber, °C", digits: 2 },
      { title: `Before, ${unit}`, digits },
      { title: `After, ${unit}`, digits },
    ],
    rows: devices.flatMap(({ serial, role, curves }) =>
      curves[part].before.map(({ chamberC, value }, index) => [
        serial,
        role,
        chamberC,
        value,
        curves[part].after[index]?.value ?? null,
      ]),
    ),
  };
}
