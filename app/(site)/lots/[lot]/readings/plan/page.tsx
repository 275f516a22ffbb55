import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { Notice } from "@/app/_components/notice";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { listEquipment } from "@/lib/services/equipment/keep-equipment";
import { getLot } from "@/lib/services/lots/get-lot";
import { getRulesOfLot } from "@/lib/services/lots/lot-rules";
import { getSamplePlan } from "@/lib/services/samples/get-sample-plan";
import { PlanForm } from "./plan-form";

export const metadata: Metadata = { title: "Plan a run" };

export default async function PlanPage({ params }: { params: Promise<{ lot: string }> }) {
  const ctx = await pageContext();
  const lot = await orNotFound(getLot(ctx, decodeURIComponent((await params).lot)));
  const readings = `/lots/${encodeURIComponent(lot.code)}/readings`;
  const title = (
    <TitleRow
      breadcrumb={[
        { name: "Lots", href: "/lots" },
        { name: lot.code, href: `/lots/${encodeURIComponent(lot.code)}` },
        { name: "Readings", href: readings },
        { name: "Plan a run" },
      ]}
      title={`Plan a run of ${lot.code}`}
      note="One chamber session: who stands where, at which temperatures, under which loads"
    />
  );
  if (!holds(ctx, "engineer"))
    return (
      <>
        {title}
        <Notice tone="caution" title="Engineers plan runs">
          Your roles let you read plans. Ask an engineer to make one.
        </Notice>
      </>
    );
  if (lot.devices === 0)
    return (
      <>
        {title}
        <Card>
          <EmptyState
            title="The lot has no serials yet"
            action={<LinkButton href={`/lots/${lot.code}`}>Add serials</LinkButton>}
          >
            A plan puts devices on places in the chamber; add them to the lot first.
          </EmptyState>
        </Card>
      </>
    );
  const today = ctx.now().toISOString().slice(0, 10);
  const { items } = await listEquipment(ctx, { limit: 1_000 });
  const { limit, coverage, confidence, earlier } = await getSamplePlan(ctx, { lot: lot.code });
  return (
    <>
      {title}
      <PlanForm
        lot={lot.code}
        family={await getRulesOfLot(ctx, lot.code)}
        equipment={items.map(({ code, kind, calibratedUntil }) => ({
          code,
          kind,
          calibratedUntil,
          overdue: calibratedUntil < today,
        }))}
        sizing={{ limit, coverage, confidence, earlier }}
      />
    </>
  );
}
