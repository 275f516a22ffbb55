import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import type { DerivationView } from "@/schemas/api/derivations";

const JUDGED_BY: Record<string, string> = { spanRatio: "span error", zeroShiftRatio: "zero shift" };

/** Devices that never fed the gain coefficient, judged with it. Nothing where there is none. */
export function VerificationCard({ results }: { results: DerivationView["verification"] }) {
  if (results.length === 0) return null;
  const judged = results.filter((one) => one.passed !== null);
  const passed = judged.filter((one) => one.passed).length;
  return (
    <Card
      title="Verification"
      note={`${passed} of ${judged.length} judged devices inside; the findings say what share of the lot that shows`}
    >
      <DataTable
        name="verification devices"
        urlName="verification"
        rows={results.map((one) => ({
          ...one,
          judged: one.judged.map((ratio) => JUDGED_BY[ratio] ?? ratio).join(", "),
        }))}
        rowKey="serial"
        columns={[
          { key: "serial", header: "Serial", format: { as: "code" } },
          {
            key: "spanErrorPpm",
            header: "Span error",
            format: { as: "quantity", name: "spanErrorPpm", sign: "always" },
          },
          { key: "spanRatio", header: "Span", format: { as: "quantity", name: "ratio" } },
          { key: "zeroShiftRatio", header: "Zero shift", format: { as: "quantity", name: "ratio" } },
          { key: "judged", header: "Judged by" },
          { key: "passed", header: "Verdict", format: { as: "yes-no", yes: "inside", no: "outside" } },
        ]}
        empty={{ title: "No verification device" }}
      />
    </Card>
  );
}
