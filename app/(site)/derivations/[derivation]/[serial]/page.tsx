import type { Metadata } from "next";
import { Card } from "@/app/_components/card";
import { LineChart } from "@/app/_components/chart/line-chart";
import { Facts } from "@/app/_components/facts";
import { FindingsList } from "@/app/_components/findings-list";
import { LegalNote } from "@/app/_components/legal-note";
import { stateOf } from "@/app/_components/state/state-of";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { COEFFICIENT_QUANTITIES, formatQuantity, type QuantityName, quantities } from "@/lib/domain/format/quantity";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import { getDerivationView, getDerivedDevice } from "@/lib/services/derivations/get-derivation";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";

export const metadata: Metadata = { title: "Device of a derivation" };

const SOURCES = {
  "own-points": "from its own loaded readings",
  "span-run": "from its span run",
  "sample-mean": "mean of the sample: this device was never loaded",
} as const;

interface PageProps {
  params: Promise<{ derivation: string; serial: string }>;
}

export default async function DerivedDevicePage({ params }: PageProps) {
  const ctx = await pageContext();
  const { derivation, serial } = await params;
  const view = await orNotFound(getDerivationView(ctx, derivation));
  const device = await orNotFound(getDerivedDevice(ctx, derivation, decodeURIComponent(serial).toUpperCase()));
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: view.lot, href: `/lots/${view.lot}` },
          { name: "Coefficients", href: `/lots/${view.lot}/coefficients` },
          { name: "Derivation", href: `/derivations/${view.id}` },
          { name: device.serial },
        ]}
        title={device.serial}
        code
        state={device.state ? stateOf("coefficient-set", device.state) : { tone: "idle", word: "no coefficients" }}
        note={`${device.role}${device.gainFrom ? `, gain ${SOURCES[device.gainFrom]}` : ""}`}
      />
      <div className="flex flex-col gap-[18px]">
        <Values device={device} />
        {device.curves ? <Curves curves={device.curves} /> : null}
        <Card title="Findings">
          <FindingsList findings={device.findings} empty="Nothing to remark on this device." />
        </Card>
        {device.points.length > 0 ? <Points device={device} /> : null}
        {device.curves ? <LegalNote /> : null}
      </div>
    </>
  );
}

function Values({ device }: { device: DerivedDeviceDetail }) {
  const { coefficients, uncertainty } = device;
  if (!coefficients) return null;
  const errors: Partial<Record<QuantityName, number | null>> = uncertainty ?? {};
  return (
    <Card title="Coefficients" note="± is one standard error; none is stated without a degree of freedom">
      <Facts
        small
        facts={COEFFICIENT_QUANTITIES.filter((name) => coefficients[name] !== undefined).map((name) => ({
          label: `${name}, ${quantities[name].unit}`,
          value: `${formatQuantity(name, coefficients[name])}${errors[name] ? ` ±${formatQuantity(name, errors[name])}` : ""}`,
        }))}
      />
    </Card>
  );
}

type Curve = NonNullable<DerivedDeviceDetail["curves"]>["spanPpm"];

function seriesOf({ before, after }: Curve) {
  const points = (values: Curve["before"]) => values.map(({ chamberC, value }) => [chamberC, value] as const);
  return [
    { name: "before", tone: "ink" as const, dashed: true, draw: "both" as const, points: points(before) },
    { name: "after", tone: "copper" as const, draw: "both" as const, points: points(after) },
  ];
}

function Curves({ curves }: { curves: NonNullable<DerivedDeviceDetail["curves"]> }) {
  return (
    <div className="grid gap-[18px] xl:grid-cols-2">
      <Card title="Unloaded output over temperature">
        <LineChart
          label="Drift of the unloaded output before and after compensation"
          xTitle="chamber, °C"
          yTitle="output, intervals (v)"
          series={seriesOf(curves.zeroIntervals)}
        />
      </Card>
      <Card title="Span error over temperature">
        {curves.spanPpm.after.length > 0 ? (
          <LineChart
            label="Span error before and after compensation"
            xTitle="chamber, °C"
            yTitle="error, ppm"
            yDigits={1}
            series={seriesOf(curves.spanPpm)}
          />
        ) : (
          <p className="py-8 text-sm text-ink-soft">The device was never loaded: nothing is said on its span.</p>
        )}
      </Card>
    </div>
  );
}

function Points({ device }: { device: DerivedDeviceDetail }) {
  const home = device.points[0]?.purpose;
  let at = 0;
  const rows = device.points.map((point) => {
    const own = point.purpose === home ? at++ : undefined;
    return {
      ...point,
      key: `${point.purpose} ${point.point}`,
      temperatureResidual: own === undefined ? null : (device.residuals?.temperature[own] ?? null),
      zeroResidual: own === undefined ? null : (device.residuals?.zero[own] ?? null),
    };
  });
  return (
    <Card
      title="Points and residuals"
      note="Means over the readings of a point; measured less fitted, of the run that thermometer and zero come from"
    >
      <DataTable
        name="points"
        rows={rows}
        rowKey="key"
        columns={[
          { key: "key", header: "Run and point" },
          { key: "chamberC", header: "Chamber", unit: "°C", format: { as: "figure", digits: 3 } },
          { key: "deviceTemp", header: "Device temperature", unit: "own unit", format: { as: "figure", digits: 2 } },
          { key: "temperatureResidual", header: "Residual", unit: "K", format: { as: "figure", digits: 4 } },
          { key: "zeroMvV", header: "Zero", format: { as: "quantity", name: "zero" } },
          { key: "zeroResidual", header: "Residual", format: { as: "quantity", name: "zero" } },
          { key: "spanMvV", header: "Span at capacity", format: { as: "quantity", name: "signal" } },
        ]}
        empty={{ title: "No points" }}
      />
    </Card>
  );
}
