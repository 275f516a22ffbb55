import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { LegalNote } from "@/app/_components/legal-note";
import { stateOf } from "@/app/_components/state/state-of";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { type FamilyRevisionView, getFamily } from "@/lib/services/families/get-family";
import { isMaker } from "@/lib/services/families/publishing";
import { listLayouts } from "@/lib/services/layouts/get-layout";
import { RevisionAction } from "./revision-actions";
import { RevisionDecision } from "./revision-decision";
import { RevisionList } from "./revision-list";
import { FamilyValues } from "./values";

interface PageProps {
  params: Promise<{ family: string }>;
  searchParams: Promise<{ revision?: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Family ${decodeURIComponent((await params).family).toUpperCase()}` };
}

export default async function FamilyPage({ params, searchParams }: PageProps) {
  const ctx = await pageContext();
  const code = decodeURIComponent((await params).family);
  const family = await orNotFound(getFamily(ctx, code));
  const layouts = await listLayouts(ctx, { family: family.code, limit: 1_000 });
  const wanted = Number((await searchParams).revision);
  const shown =
    family.revisions.find((revision) => revision.number === wanted) ?? (family.revisions[0] as FamilyRevisionView);
  const before = family.revisions.find((revision) => revision.number < shown.number && revision.publishedAt !== null);
  const engineer = holds(ctx, "engineer");
  const wrote = await isMaker(ctx, "family-revision", shown.id);
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Families", href: "/families" }, { name: family.code }]}
        title={family.code}
        code
        state={stateOf("revision", shown.state)}
        note={`${String(shown.document.name)} · revision ${shown.number} of ${family.newestRevision}`}
        actions={
          <>
            {engineer && shown.state !== "draft" ? (
              <LinkButton href={`/families/${family.code}/revise`}>New revision</LinkButton>
            ) : null}
            {engineer && shown.state === "draft" ? (
              <RevisionAction code={family.code} number={shown.number} move="submit" />
            ) : null}
            {engineer && shown.state === "in-review" && shown.submittedBy === ctx.actor.name ? (
              <RevisionAction code={family.code} number={shown.number} move="take-back" />
            ) : null}
          </>
        }
      />
      <div className="flex flex-col gap-[18px]">
        {shown.state === "in-review" && holds(ctx, "reviewer") && !wrote ? (
          <RevisionDecision
            code={family.code}
            number={shown.number}
            digest={shown.sha256}
            makers={shown.makers}
            oneTimeCode={await hasOneTimeCode(ctx)}
            changes={<FamilyValues values={shown.document} before={before?.document} />}
          />
        ) : null}
        <div className="grid items-start gap-[18px] lg:grid-cols-[minmax(0,2fr)_minmax(0,1fr)]">
          <Card title="Values" note={before ? `against revision ${before.number}` : undefined}>
            <FamilyValues values={shown.document} before={before?.document} />
            <div className="mt-3 flex flex-col gap-2">
              <Digest value={shown.sha256} name="revision digest" />
              <LegalNote />
            </div>
          </Card>
          <Card title="Revisions">
            <RevisionList code={family.code} revisions={family.revisions} shown={shown.number} />
          </Card>
        </div>
        <Card
          title="Layouts"
          aside={
            <span className="flex flex-wrap gap-2">
              <LinkButton href={`/families/${family.code}/layouts`}>Firmware and use</LinkButton>
              {engineer ? <LinkButton href={`/families/${family.code}/layouts/new`}>New layout</LinkButton> : null}
            </span>
          }
        >
          <DataTable
            name="layouts"
            rows={layouts.items}
            rowKey="version"
            rowHref={`/families/${family.code}/layouts/{version}`}
            columns={[
              { key: "version", header: "Layout", format: { as: "code" } },
              { key: "state", header: "State", format: { as: "state", kind: "layout" } },
              { key: "firmware", header: "Firmware", format: { as: "code" } },
              { key: "order", header: "Order", format: { as: "count" } },
              { key: "bytes", header: "Memory", unit: "bytes", format: { as: "count" } },
              {
                key: "step",
                header: "Step",
                title: "Computed from the differences to the newest published lower version",
              },
              { key: "updatedBy", header: "Last written by" },
              { key: "updatedAt", header: "Last written", format: { as: "time" } },
            ]}
            empty={{
              title: "No layout yet",
              text: "A layout says which bytes of the EEPROM hold what. Packages are built from a published one.",
              action: engineer ? (
                <LinkButton href={`/families/${family.code}/layouts/new`} look="primary">
                  Write a layout
                </LinkButton>
              ) : undefined,
            }}
          />
        </Card>
        <p className="text-sm">
          <LinkButton href={`/lots?family=${family.code}`}>Lots of {family.code}</LinkButton>
        </p>
      </div>
    </>
  );
}
