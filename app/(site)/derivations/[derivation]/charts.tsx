import { Card } from "@/app/_components/card";
import { DotHistogram } from "@/app/_components/chart/dot-histogram";
import { EnvelopeChart } from "@/app/_components/chart/envelope-chart";
import { decisiveLoads, maximumPermissibleError, spanErrorInIntervals } from "@/lib/domain/compensation/envelope";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import { formatCount, formatPercent } from "@/lib/domain/format/figure";
import type { ChartDevice, DerivationChart } from "@/lib/services/derivations/get-derivation-chart";
import type { DerivationView } from "@/schemas/api/derivations";

interface ChartsProps {
  view: DerivationView;
  rules: FamilyRules;
  devices: readonly ChartDevice[];
}

/** "the first 200 of 5,000", where not every loaded device is drawn by itself. */
export function drawnNote({ devices, loaded }: DerivationChart): string | undefined {
  return loaded > devices.length
    ? `the first ${formatCount(devices.length)} of ${formatCount(loaded)} loaded devices, by serial`
    : undefined;
}

const PPM = 1e6;
const shareOf = (share: number) => formatPercent(share).replace(" %", "");
const asPpm = (range: readonly [number, number]) => [range[0] * PPM, range[1] * PPM] as const;

/** The two pictures of a derivation: what the errors use of the envelope, and how the gain coefficient scatters. */
export function DerivationCharts({ view, chart }: { view: DerivationView; chart: DerivationChart }) {
  const { rules, devices } = chart;
  const note = drawnNote(chart);
  return (
    <div className="grid gap-[18px] xl:grid-cols-2">
      <ErrorChart view={view} rules={rules} devices={devices} note={note} />
      <GainChart view={view} devices={devices} note={note} />
    </div>
  );
}

function ErrorChart({ view, rules, devices, note }: ChartsProps & { note?: string }) {
  const { accuracyClass, intervals, pLc } = rules;
  const judged = devices.filter((device) => device.spanErrorPpm !== null && device.role !== "excluded");
  const lines = judged.map(({ serial, role, spanErrorPpm }) => {
    const error = (load: number) => spanErrorInIntervals((spanErrorPpm ?? 0) / PPM, load);
    return {
      name: serial,
      role: role === "verification" ? role : ("sample" as const),
      points: [0, ...decisiveLoads(rules)].map((load) => [load, error(load)] as const),
    };
  });
  const title =
    view.method === "pooled-gain"
      ? "Span error with the pooled coefficient, worst temperature of each device"
      : "Span error, worst temperature of each device";
  return (
    <Card title={title} note={note}>
      {lines.length === 0 ? (
        <p className="py-8 text-sm text-ink-soft">
          No device has a loaded reading beside the ones its gain was taken from: no error can be stated.
        </p>
      ) : (
        <EnvelopeChart
          label={`${title}: ${lines.length} devices against the envelope of class ${accuracyClass}`}
          envelopeName={`class ${accuracyClass}, ${formatCount(intervals)} intervals, p_LC ${pLc}`}
          steps={decisiveLoads(rules).map((upTo) => ({ upTo, limit: maximumPermissibleError(upTo, rules) }))}
          lines={lines}
        />
      )}
    </Card>
  );
}

function GainChart({ view, devices, note }: Omit<ChartsProps, "rules"> & { note?: string }) {
  const { pooled } = view;
  const values = devices
    .filter((device) => device.gainTc !== null)
    .map(({ serial, role, gainTc }) => ({
      name: serial,
      value: (gainTc ?? 0) * PPM,
      role: role === "verification" || role === "excluded" ? role : ("sample" as const),
    }));
  return (
    <Card title="Gain coefficient, each loaded device" note={note}>
      {values.length === 0 ? (
        <p className="py-8 text-sm text-ink-soft">No device was loaded at two temperatures or more.</p>
      ) : (
        <DotHistogram
          label={`Gain coefficient of ${values.length} devices in ppm per kelvin`}
          xTitle="gainTc, ppm/K"
          values={values}
          mean={pooled ? pooled.gainTc * PPM : null}
          tolerance={pooled?.toleranceInterval ? asPpm(pooled.toleranceInterval) : null}
          toleranceName={pooled ? `${shareOf(pooled.coverage)}/${shareOf(pooled.confidence)} tolerance` : undefined}
          limit={pooled ? asPpm([pooled.gainTc - pooled.limit, pooled.gainTc + pooled.limit]) : null}
        />
      )}
    </Card>
  );
}
