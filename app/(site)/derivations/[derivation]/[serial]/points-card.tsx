import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";

/** Means over the readings of each point, and what the fits leave of them. */
export function PointsCard({ device }: { device: DerivedDeviceDetail }) {
  return (
    <Card
      title="Points and residuals"
      note="Means over the readings of a point; measured less fitted, of the run that thermometer and zero come from"
    >
      <DataTable
        name="points"
        urlName="points"
        rows={rowsOf(device)}
        rowKey="key"
        columns={[
          { key: "key", header: "Run and point" },
          { key: "chamberC", header: "Chamber", unit: "°C", format: { as: "figure", digits: 3 } },
          { key: "deviceTemp", header: "Device temperature", unit: "own unit", format: { as: "figure", digits: 2 } },
          { key: "temperatureResidual", header: "Residual", unit: "K", format: { as: "figure", digits: 4 } },
          { key: "zeroMvV", header: "Zero", format: { as: "quantity", name: "zero" } },
          { key: "zeroResidual", header: "Residual", format: { as: "quantity", name: "zero" } },
          { key: "spanMvV", header: "Span at capacity", format: { as: "quantity", name: "signal" } },
          {
            key: "gainResidual",
            header: "Residual of gain",
            unit: "ppm",
            title: "Gain that the point needs less the gain of the set there",
            format: { as: "figure", digits: 1 },
          },
        ]}
        empty={{ title: "No points" }}
      />
    </Card>
  );
}

function rowsOf({ points, residuals, coefficients }: DerivedDeviceDetail) {
  const home = points[0]?.purpose;
  let at = 0;
  let loaded = 0;
  return points.map((point) => {
    const own = point.purpose === home ? at++ : undefined;
    const gain = point.spanMvV === null ? undefined : residuals?.gain?.[loaded++];
    return {
      ...point,
      key: `${point.purpose} ${point.point}`,
      temperatureResidual: own === undefined ? null : (residuals?.temperature[own] ?? null),
      zeroResidual: own === undefined ? null : (residuals?.zero[own] ?? null),
      gainResidual: gain === undefined || !coefficients ? null : (gain / coefficients.gain) * 1e6,
    };
  });
}
