import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { Notice } from "@/app/_components/notice";
import { TitleRow } from "@/app/_components/title-row";
import { holds, pageContext } from "@/lib/http/page-context";
import { listFamilies } from "@/lib/services/families/get-family";
import { LotForm } from "./lot-form";

export const metadata: Metadata = { title: "Make a lot" };

export default async function NewLotPage({ searchParams }: { searchParams: Promise<{ family?: string }> }) {
  const ctx = await pageContext();
  const { items } = await listFamilies(ctx, { limit: 1_000 });
  const families = items
    .filter((family) => family.revision !== null)
    .map(({ code, name, revision }) => ({ value: code, name: `${code}, ${name} (revision ${revision})` }));
  return (
    <>
      <TitleRow breadcrumb={[{ name: "Lots", href: "/lots" }, { name: "New" }]} title="Make a lot" />
      {!holds(ctx, "engineer") ? (
        <Notice tone="caution" title="Engineers make lots">
          Your roles let you read lots. Ask an engineer to make one.
        </Notice>
      ) : families.length === 0 ? (
        <Card>
          <EmptyState
            title="No family is published yet"
            action={<LinkButton href="/families">Go to families</LinkButton>}
          >
            A lot pins a family's published values. Add a family, and have a second person publish it.
          </EmptyState>
        </Card>
      ) : (
        <LotForm families={families} family={(await searchParams).family} />
      )}
    </>
  );
}
