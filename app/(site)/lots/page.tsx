import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getFamily } from "@/lib/services/families/get-family";

export const metadata: Metadata = { title: "Lots" };

export default async function LotsPage({ searchParams }: { searchParams: Promise<{ family?: string }> }) {
  const ctx = await pageContext();
  const { family: wanted } = await searchParams;
  const family = wanted === undefined ? undefined : (await orNotFound(getFamily(ctx, wanted))).code;
  const add = holds(ctx, "engineer") ? (
    <LinkButton href={family === undefined ? "/lots/new" : `/lots/new?family=${family}`} look="primary">
      Make a lot
    </LinkButton>
  ) : undefined;
  return (
    <>
      <TitleRow
        breadcrumb={family === undefined ? [] : [{ name: "Lots", href: "/lots" }, { name: family }]}
        title={family === undefined ? "Lots" : `Lots of ${family}`}
        note="Production batches, newest first"
        actions={add}
      />
      <Card>
        <DataTable
          name="lots"
          endpoint={family === undefined ? "/api/v1/lots" : `/api/v1/lots?family=${family}`}
          rowKey="code"
          rowHref="/lots/{code}"
          columns={[
            { key: "code", header: "Lot", format: { as: "code" } },
            { key: "family", header: "Family", format: { as: "code" } },
            { key: "state", header: "State", format: { as: "state", kind: "lot" } },
            { key: "devices", header: "Devices", format: { as: "count" } },
            { key: "firmware", header: "Firmware", format: { as: "code" } },
            { key: "revision", header: "Family values", unit: "revision", format: { as: "count" } },
            { key: "createdBy", header: "Made by" },
            { key: "createdAt", header: "Made", format: { as: "time" } },
          ]}
          chips={[
            { id: "live", name: "Live", key: "state", in: ["live"] },
            { id: "review", name: "In review", key: "state", in: ["in-review", "approved"] },
            { id: "work", name: "In work", key: "state", in: ["planned", "reading", "derived", "building"] },
          ]}
          empty={{
            title: "No lot yet",
            text: "A lot is a production batch of one family, with its serials. Make one, add its serials, then upload a temperature test.",
            action: add,
          }}
        />
      </Card>
    </>
  );
}
