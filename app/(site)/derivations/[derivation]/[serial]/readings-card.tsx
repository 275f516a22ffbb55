import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import type { DeviceEvidence } from "@/lib/services/derivations/get-device-evidence";

/** Every reading of the device in the runs of the derivation, as uploaded; a row leads to its run. */
export function ReadingsCard({ readings }: { readings: DeviceEvidence["readings"] }) {
  return (
    <Card title="Its readings" note="As uploaded; a row opens its run">
      <DataTable
        name="readings"
        urlName="readings"
        rows={readings.map((reading) => ({ ...reading, key: `${reading.purpose} ${reading.row}` }))}
        rowKey="key"
        rowHref="/runs/{runId}"
        columns={[
          { key: "key", header: "Run and row" },
          { key: "point", header: "Point", format: { as: "count" } },
          { key: "chamberC", header: "Chamber", unit: "°C", format: { as: "figure", digits: 2 } },
          { key: "soakMin", header: "Soak", unit: "min", format: { as: "figure", digits: 0 } },
          { key: "deviceTemp", header: "Device temperature", unit: "own unit", format: { as: "figure", digits: 2 } },
          { key: "loadKg", header: "Load", format: { as: "quantity", name: "load" } },
          { key: "signalMvV", header: "Signal", format: { as: "quantity", name: "signal" } },
          { key: "dwellS", header: "Dwell", unit: "s", format: { as: "figure", digits: 0 }, hidden: true },
          { key: "position", header: "Position", hidden: true },
          { key: "takenAt", header: "Taken", format: { as: "time" } },
        ]}
        empty={{ title: "No readings", text: "Imported values have no readings behind them." }}
      />
    </Card>
  );
}
