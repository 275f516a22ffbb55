import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { TitleRow } from "@/app/_components/title-row";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getFamily } from "@/lib/services/families/get-family";
import { listLayouts } from "@/lib/services/layouts/get-layout";
import { listFamilyLayoutUses } from "@/lib/services/layouts/get-layout-use";
import { listLots } from "@/lib/services/lots/get-lot";
import { LayoutTable } from "./layout-table";
import { LayoutTimeline } from "./layout-timeline";

interface PageProps {
  params: Promise<{ family: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Layouts of ${decodeURIComponent((await params).family).toUpperCase()}` };
}

/** A family's layouts: which firmware each is for, and which lots were built from it. */
export default async function LayoutsPage({ params }: PageProps) {
  const ctx = await pageContext();
  const family = await orNotFound(getFamily(ctx, decodeURIComponent((await params).family)));
  const { items: layouts } = await listLayouts(ctx, { family: family.code, limit: 1_000 });
  const uses = await listFamilyLayoutUses(ctx, family.code);
  const lots = await listLots(ctx, { family: family.code, limit: 1_000 });
  const engineer = holds(ctx, "engineer");
  const rows = layouts.map((layout) => ({ layout, uses: uses.get(layout.id) ?? [] }));
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Families", href: "/families" },
          { name: family.code, href: `/families/${family.code}` },
          { name: "Layouts" },
        ]}
        title={`Layouts of ${family.code}`}
        note={`${formatNumberOf(layouts.length, "layout")}, ${formatNumberOf(lots.items.length, "lot")}`}
        actions={
          engineer ? (
            <LinkButton href={`/families/${family.code}/layouts/new`} look="primary">
              New layout
            </LinkButton>
          ) : null
        }
      />
      {layouts.length === 0 ? (
        <EmptyState title="No layout yet">
          A layout says which bytes of the EEPROM hold what. Packages are built from a published one.
        </EmptyState>
      ) : (
        <div className="grid grid-cols-1 items-start gap-[18px] xl:grid-cols-2">
          <Card title="Firmware that reads them" note="each bar is the range of firmware versions of a layout">
            <LayoutTimeline layouts={layouts} lots={lots.items} />
          </Card>
          <Card title="Versions and where they are used">
            <LayoutTable family={family.code} rows={rows} mayRetire={engineer || holds(ctx, "reviewer")} />
          </Card>
        </div>
      )}
    </>
  );
}
