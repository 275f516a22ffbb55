import type { Metadata } from "next";
import Link from "next/link";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { Facts } from "@/app/_components/facts";
import { TabLinks } from "@/app/_components/tab-links";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { pageContext } from "@/lib/http/page-context";
import {
  countImpact,
  IMPACT_KINDS,
  type ImpactCounts,
  type ImpactKind,
  listImpactChoices,
} from "@/lib/services/trace/survey-impact";
import { impactQuery } from "@/schemas/api/devices";
import { SourceForm } from "./source-form";

export const metadata: Metadata = { title: "Impact" };

const kindNames: Record<ImpactKind, string> = {
  run: "Run",
  derivation: "Derivation",
  layout: "Layout",
  package: "Package",
  equipment: "Equipment",
};

interface PageProps {
  searchParams: Promise<Record<string, string | undefined>>;
}

/** Forward trace: every serial that one run, derivation, layout, package or piece of equipment reached. The question stands in the address. */
export default async function ImpactPage({ searchParams }: PageProps) {
  const ctx = await pageContext();
  const given = await searchParams;
  const kind =
    IMPACT_KINDS.find((one) => given[one] !== undefined) ?? IMPACT_KINDS.find((one) => one === given.of) ?? "run";
  const range = { from: moment(given.from, "start"), to: moment(given.to, "end") };
  const asked = impactQuery.safeParse({
    [kind]: given[kind],
    ...(kind === "equipment" && range.from ? { from: range.from } : {}),
    ...(kind === "equipment" && range.to ? { to: range.to } : {}),
  });
  const value = asked.success ? asked.data[kind] : undefined;
  const choices = await listImpactChoices(ctx, kind);
  const counts = asked.success && value ? await countImpact(ctx, asked.data) : null;
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Trace", href: "/trace" }, { name: "Impact" }]}
        title="What did it reach?"
        note="From one thing forward to every serial, with the state each is in now"
      />
      <TabLinks
        label="Kinds of things"
        current={`/trace/impact?of=${kind}`}
        links={IMPACT_KINDS.map((one) => ({ href: `/trace/impact?of=${one}`, name: kindNames[one] }))}
      />
      <div className="flex flex-col gap-[18px]">
        <Card>
          <SourceForm
            key={kind}
            kind={kind}
            name={kindNames[kind]}
            choices={choices}
            value={value ?? ""}
            from={given.from?.slice(0, 10) ?? ""}
            to={given.to?.slice(0, 10) ?? ""}
          />
        </Card>
        {given[kind] && !value ? (
          <Card title="That address is not complete" look="caution">
            <p className="text-sm text-ink-soft">It names no {kind} as they are named here. Choose one above.</p>
          </Card>
        ) : null}
        {counts && value && asked.success ? (
          <Reached counts={counts} endpoint={endpointOf(kind, value, asked.data)} />
        ) : null}
        {!counts && !given[kind] ? (
          <Card>
            <EmptyState title={`Choose a ${kind === "equipment" ? "piece of equipment" : kind}`}>
              When a sensor comes back bad from calibration, a run turns out wrong or a layout has to be recalled, this
              says which devices are touched, which of them carry the bytes now, and which have left the house.{" "}
              <Link href="/trace">Looking for one serial?</Link>
            </EmptyState>
          </Card>
        ) : null}
      </div>
    </>
  );
}

function Reached({ counts, endpoint }: { counts: ImpactCounts; endpoint: string }) {
  return (
    <>
      <Card title="Reached" note={counts.more ? "at least; there are more than were counted" : undefined}>
        <Facts
          facts={[
            {
              value: formatCount(counts.devices),
              label: counts.lots === 1 ? "devices of one lot" : `devices of ${counts.lots} lots`,
            },
            { value: formatCount(counts.carrying), label: "carry an image that was reached" },
            { value: formatCount(counts.carryingShipped), label: "of those are shipped" },
            { value: formatCount(counts.unknown), label: "carry nobody knows what" },
            { value: formatCount(counts.held), label: "are held" },
          ]}
        />
      </Card>
      <Card title="Serials">
        <DataTable
          key={endpoint}
          name="serials reached"
          endpoint={endpoint}
          rowKey="serial"
          rowHref="/trace/{serial}"
          columns={[
            { key: "serial", header: "Serial", format: { as: "code" } },
            { key: "lot", header: "Lot", format: { as: "link", href: "/lots/{lot}" } },
            {
              key: "coefficients",
              header: "Its set",
              title: "State of the coefficient set that was reached",
              format: { as: "state", kind: "coefficient-set" },
            },
            { key: "role", header: "Role" },
            { key: "packages", header: "In packages", title: "Packages that hold an image that was reached" },
            { key: "carries", header: "Carries", title: "Version by the deciding write record" },
            { key: "outcome", header: "Last write", format: { as: "state", kind: "write-outcome" } },
            { key: "carriesReached", header: "Carries it now", format: { as: "yes-no", yes: "yes", no: "no" } },
            { key: "held", header: "Held", format: { as: "yes-no", yes: "held", no: "" } },
            { key: "shipped", header: "Shipped", format: { as: "yes-no", yes: "shipped", no: "" } },
          ]}
          chips={[
            { id: "carrying", name: "Carry it now", key: "carriesReached", in: [true] },
            { id: "shipped", name: "Shipped", key: "shipped", in: [true] },
            { id: "held", name: "Held", key: "held", in: [true] },
          ]}
          empty={{
            title: "It reached no serial",
            text: "Nothing was measured, derived or packed from it.",
          }}
        />
      </Card>
    </>
  );
}

function endpointOf(kind: ImpactKind, value: string, { from, to }: { from?: string; to?: string }): string {
  const query = new URLSearchParams({ [kind]: value, ...(from && { from }), ...(to && { to }) });
  return `/api/v1/trace/impact?${query}`;
}

/** A day of the form, or a moment of a deep link, as a moment; undefined where it is neither. */
function moment(text: string | undefined, edge: "start" | "end"): string | undefined {
  if (!text) return undefined;
  const full = /^\d{4}-\d{2}-\d{2}$/.test(text)
    ? `${text}T${edge === "start" ? "00:00:00.000" : "23:59:59.999"}Z`
    : text;
  const at = new Date(full);
  return Number.isNaN(at.getTime()) ? undefined : at.toISOString();
}
