import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { DataTable } from "@/app/_components/table/data-table";
import { formatCount } from "@/lib/domain/format/figure";
import type { ProofDevice, ProofRunView } from "@/schemas/api/proofs";

/** Coefficients that the readings showed to be applied, and in brackets those they could not have shown. */
function shownText({ shown }: ProofDevice): string {
  const named = shown.filter((one) => one.shown).map((one) => one.name);
  const rest = shown.filter((one) => !one.shown).map((one) => one.name);
  return [named.join(", "), rest.length > 0 ? `(not ${rest.join(", ")})` : ""].filter(Boolean).join(" ");
}

/** A proof run's outputs against what the images predict, device by device and reading by reading. */
export function ProofCard({ proof }: { proof: ProofRunView }) {
  const readings = proof.devices.flatMap(({ serial, rows }) => rows.map((row) => ({ serial, ...row })));
  return (
    <Card
      title="Output against prediction"
      note="computed from the decoded image that each device carried when it was read; a third of the error limit is allowed"
    >
      <Facts
        facts={[
          { value: formatCount(proof.counts.agrees), label: "agree" },
          { value: formatCount(proof.counts.differs), label: "differ" },
          { value: formatCount(proof.counts.notJudged), label: "not judged" },
        ]}
      />
      <div className="mt-4">
        <DataTable
          name="proven devices"
          urlName="proof"
          rows={proof.devices.map((device) => ({ ...device, shownText: shownText(device) }))}
          rowKey="serial"
          rowHref="/trace/{serial}"
          columns={[
            { key: "serial", header: "Serial", format: { as: "code" } },
            { key: "state", header: "Verdict", format: { as: "state", kind: "proof" } },
            {
              key: "worst.differenceIntervals",
              header: "Largest difference",
              unit: "v",
              format: { as: "figure", digits: 3, sign: "always" },
            },
            { key: "worst.limitIntervals", header: "Allowed", unit: "±v", format: { as: "figure", digits: 3 } },
            { key: "worst.chamberC", header: "At", format: { as: "quantity", name: "temperature" } },
            { key: "worst.loadKg", header: "Load", format: { as: "quantity", name: "load" } },
            {
              key: "shownText",
              header: "Shown to be applied",
              title: "Without this coefficient the prediction would have been off by more than twice the limit",
            },
            { key: "version", header: "Release" },
            { key: "layout", header: "Layout", hidden: true },
            { key: "firmware", header: "Firmware" },
            { key: "reason", header: "Why not judged" },
          ]}
          empty={{ title: "No device" }}
        />
      </div>
      {readings.length > 0 ? (
        <details className="mt-4">
          <summary className="cursor-pointer text-sm font-semibold">Every reading</summary>
          <div className="mt-2">
            <DataTable
              name="proven readings"
              urlName="proof-reading"
              rows={readings}
              rowKey="row"
              columns={[
                { key: "row", header: "Row", format: { as: "count" } },
                { key: "serial", header: "Serial", format: { as: "code" } },
                { key: "chamberC", header: "Chamber", format: { as: "quantity", name: "temperature" } },
                { key: "loadKg", header: "Load", format: { as: "quantity", name: "load" } },
                { key: "outputMvV", header: "Output", unit: "mV/V", format: { as: "figure", digits: 7 } },
                { key: "predictedMvV", header: "Predicted", unit: "mV/V", format: { as: "figure", digits: 7 } },
                {
                  key: "differenceIntervals",
                  header: "Difference",
                  unit: "v",
                  format: { as: "figure", digits: 3, sign: "always" },
                },
                { key: "limitIntervals", header: "Allowed", unit: "±v", format: { as: "figure", digits: 3 } },
              ]}
              empty={{ title: "No reading" }}
            />
          </div>
        </details>
      ) : null}
      <p className="mt-3 text-sm text-ink-soft">
        The signal read beside the output cancels out: what is left is whether the firmware computes with these bytes as
        the layout says. It is no statement on the cell's errors.
      </p>
    </Card>
  );
}
