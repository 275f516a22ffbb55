import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import type { RunPlanSummary } from "@/schemas/api/run-plans";

/** A lot's planned runs, those that wait first; nothing where none was ever planned. */
export function PlannedRuns({ plans }: { plans: readonly RunPlanSummary[] }) {
  if (plans.length === 0) return null;
  const rows = [...plans].sort((a, b) => Number(b.state === "planned") - Number(a.state === "planned")).map(rowOf);
  return (
    <Card title="Planned runs" note="Run sheet and template to fill in stand on each plan's page">
      <DataTable
        name="planned runs"
        rows={rows}
        rowKey="id"
        rowHref="/lots/{lot}/readings/plans/{id}"
        columns={[
          { key: "name", header: "Plan" },
          { key: "state", header: "State", format: { as: "state", kind: "run-plan" } },
          { key: "purpose", header: "Purpose" },
          { key: "temperatures", header: "Set points", unit: "°C", title: "In working order" },
          { key: "deviceCount", header: "Devices", format: { as: "count" } },
          { key: "equipmentCodes", header: "Equipment" },
          { key: "createdAt", header: "Planned", format: { as: "time" } },
          { key: "createdBy", header: "By" },
        ]}
        chips={[{ id: "waiting", name: "Waiting", key: "state", in: ["planned"] }]}
        empty={{ title: "No plans" }}
      />
    </Card>
  );
}

function rowOf(plan: RunPlanSummary) {
  const { points, ...row } = plan;
  return { ...row, temperatures: points.map((point) => String(point.setC).replace("-", "−")).join(", ") };
}
