import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { holds, pageContext } from "@/lib/http/page-context";
import { listFamilies } from "@/lib/services/families/get-family";

export const metadata: Metadata = { title: "Families" };

export default async function FamiliesPage() {
  const ctx = await pageContext();
  const { items } = await listFamilies(ctx, { limit: 1_000 });
  const add = holds(ctx, "engineer") ? (
    <LinkButton href="/families/new" look="primary">
      Add a family
    </LinkButton>
  ) : null;
  return (
    <>
      <TitleRow
        title="Families"
        note="Device types with their values, test rules and memory layouts"
        actions={
          <>
            <LinkButton href="/equipment">Equipment</LinkButton>
            {add}
          </>
        }
      />
      <Card>
        <DataTable
          name="families"
          rows={items}
          rowKey="code"
          rowHref="/families/{code}"
          columns={[
            { key: "code", header: "Family", format: { as: "code" } },
            { key: "name", header: "Name" },
            { key: "capacityKg", header: "Capacity", unit: "kg", format: { as: "figure", digits: 3 } },
            { key: "nominalMvV", header: "Output", unit: "mV/V", format: { as: "figure", digits: 3 } },
            { key: "accuracyClass", header: "Class" },
            { key: "intervals", header: "Intervals", unit: "n", format: { as: "count" } },
            { key: "revision", header: "Published", unit: "revision", format: { as: "count" } },
            { key: "state", header: "Newest revision", format: { as: "state", kind: "revision" } },
            { key: "layouts", header: "Layouts", unit: "published", format: { as: "count" } },
            { key: "lots", header: "Lots", format: { as: "count" } },
          ]}
          sort={{ key: "code", descending: false }}
          chips={[{ id: "review", name: "In review", key: "state", in: ["in-review"] }]}
          empty={{
            title: "No family yet",
            text: "A family holds what all devices of one type share. An engineer adds it, a second person publishes it, then lots can be made.",
            action: add,
          }}
        />
      </Card>
    </>
  );
}
