import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";

/** Every device of a derivation with its values, its error and its findings. */
export function DevicesCard({ id, noFreedom, order }: { id: string; noFreedom: boolean; order: number }) {
  const few = order === 1 ? "Two temperatures" : "Three temperatures";
  return (
    <Card title="Devices">
      <DataTable
        name="devices"
        urlName="devices"
        endpoint={`/api/v1/derivations/${id}/devices`}
        rowKey="serial"
        rowHref={`/derivations/${id}/{serial}`}
        note={noFreedom ? `${few} leave no degree of freedom: fits pass through their points.` : undefined}
        columns={[
          { key: "serial", header: "Serial", format: { as: "code" } },
          { key: "role", header: "Role" },
          { key: "individual.gainTc", header: "own gainTc", format: { as: "quantity", name: "gainTc" } },
          { key: "coefficients.gainTc", header: "gainTc", format: { as: "quantity", name: "gainTc" }, hidden: true },
          { key: "coefficients.zeroTc", header: "zeroTc", format: { as: "quantity", name: "zeroTc" } },
          {
            key: "uncertainty.zeroTc",
            header: "zeroTc ±",
            title: "Standard error; none without a degree of freedom",
            format: { as: "quantity", name: "zeroTc" },
            hidden: noFreedom,
          },
          { key: "coefficients.zero", header: "zero", format: { as: "quantity", name: "zero" } },
          { key: "coefficients.gain", header: "gain", format: { as: "quantity", name: "gain" } },
          {
            key: "coefficients.gainTc2",
            header: "gainTc2",
            format: { as: "quantity", name: "gainTc2" },
            hidden: order === 1,
          },
          {
            key: "coefficients.zeroTc2",
            header: "zeroTc2",
            format: { as: "quantity", name: "zeroTc2" },
            hidden: order === 1,
          },
          {
            key: "coefficients.tempOffset",
            header: "tempOffset",
            format: { as: "quantity", name: "tempOffset" },
            hidden: true,
          },
          {
            key: "coefficients.tempSlope",
            header: "tempSlope",
            format: { as: "quantity", name: "tempSlope" },
            hidden: true,
          },
          {
            key: "spanErrorPpm",
            header: "span error",
            format: { as: "quantity", name: "spanErrorPpm", sign: "always" },
          },
          {
            key: "spanRatio",
            header: "span",
            title: "Share of the envelope; up to 1 is inside",
            format: { as: "quantity", name: "ratio" },
          },
          {
            key: "zeroShiftRatio",
            header: "zero shift",
            title: "Share of the limit; up to 1 is inside",
            format: { as: "quantity", name: "ratio" },
          },
          { key: "findings.length", header: "Findings", format: { as: "count" } },
          { key: "state", header: "State", format: { as: "state", kind: "coefficient-set" } },
        ]}
        chips={[
          { id: "findings", name: "With findings", key: "findings.length", above: 0 },
          { id: "sample", name: "Sample", key: "role", in: ["sample"] },
          { id: "zero", name: "Zero-only", key: "role", in: ["zero"] },
          { id: "verification", name: "Verification", key: "role", in: ["verification"] },
          { id: "excluded", name: "Excluded", key: "role", in: ["excluded"] },
        ]}
        empty={{ title: "No device", text: "The runs named no device." }}
      />
    </Card>
  );
}
