import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { EQUIPMENT_NAMES, formatUncertainty, plainDigits, UNCERTAINTY_UNITS } from "@/lib/domain/format/certificate";
import { formatDate } from "@/lib/domain/format/time";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getEquipment } from "@/lib/services/equipment/keep-equipment";
import { listEquipmentUse } from "@/lib/services/equipment/list-equipment-use";
import { listEntries } from "@/lib/services/ledger/list-events";
import type { ChamberPosition } from "@/schemas/api/equipment";
import { dueMark } from "../due-mark";
import { History } from "./history";
import { NewCertificate } from "./new-certificate";

interface PageProps {
  params: Promise<{ code: string }>;
}

const SHOWN = 1_000;

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: decodeURIComponent((await params).code) };
}

/** A piece of equipment: its certificate now, every change of it, and the runs it was used in. */
export default async function EquipmentPage({ params }: PageProps) {
  const ctx = await pageContext();
  const one = await orNotFound(getEquipment(ctx, decodeURIComponent((await params).code)));
  const { items: runs } = await listEquipmentUse(ctx, one.code, { limit: SHOWN });
  const changes = { subject: one.code, action: "equipment.", order: "desc", limit: 100 } as const;
  const { items: events } = await listEntries(ctx, changes);
  const today = ctx.now().toISOString().slice(0, 10);
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Equipment", href: "/equipment" }, { name: one.code }]}
        title={one.code}
        code
        state={dueMark(one.calibratedUntil, today)}
        note={EQUIPMENT_NAMES[one.kind]}
        actions={
          <>
            <LinkButton href={`/trace/impact?equipment=${encodeURIComponent(one.code)}`} look="outline">
              Devices it reached
            </LinkButton>
            {holds(ctx, "engineer") ? <NewCertificate equipment={one} /> : null}
          </>
        }
      />
      <div className="flex flex-col gap-[18px]">
        <Card title="Certificate" note="As it holds for runs uploaded from now on">
          <Facts
            small
            facts={[
              { label: "Certificate", value: one.certificate },
              { label: "Calibrated until", value: formatDate(one.calibratedUntil) },
              {
                label: "Expanded uncertainty",
                value: formatUncertainty(one.kind, one.uncertainty, one.coverageFactor),
              },
              {
                label: "Standard uncertainty",
                value: `${standard(one.uncertainty, one.coverageFactor)} ${UNCERTAINTY_UNITS[one.kind]}`,
              },
            ]}
          />
        </Card>
        {one.kind === "chamber" ? <Places positions={one.positions} coverageFactor={one.coverageFactor} /> : null}
        <Card title="Runs that used it" note="Each keeps the certificate of its day">
          <DataTable
            name={`runs with ${one.code}`}
            rows={runs.map((run) => ({
              ...run,
              uncertaintyText: formatUncertainty(one.kind, run.uncertainty, run.coverageFactor),
            }))}
            rowKey="run"
            rowHref="/runs/{run}"
            columns={[
              { key: "createdAt", header: "Uploaded", format: { as: "time" } },
              { key: "lot", header: "Lot", format: { as: "code" } },
              { key: "purpose", header: "Purpose" },
              { key: "devices", header: "Devices", format: { as: "count" } },
              { key: "certificate", header: "Certificate" },
              { key: "calibratedUntil", header: "Calibrated until", format: { as: "date" } },
              { key: "uncertaintyText", header: "Uncertainty", format: { as: "code" } },
              { key: "counted", header: "Counts", format: { as: "yes-no", yes: "yes", no: "no, superseded" } },
            ]}
            empty={{
              title: "Not used yet",
              text: "Once an uploaded run names it, the run stands here with the certificate of that day.",
            }}
          />
          {runs.length === SHOWN ? (
            <p className="mt-2 text-sm text-ink-soft">The newest 1,000 runs; the API lists the rest.</p>
          ) : null}
        </Card>
        <Card
          title="Changes"
          aside={<Link href={`/ledger?subject=${encodeURIComponent(one.code)}`}>In the ledger</Link>}
        >
          <History kind={one.kind} events={events} />
        </Card>
      </div>
    </>
  );
}

/** Two figures are what such an uncertainty carries (JCGM 100:2008, 7.2.6). */
function standard(uncertainty: number, coverageFactor: number): string {
  return plainDigits(Number((uncertainty / coverageFactor).toPrecision(2)));
}

function Places({ positions, coverageFactor }: { positions: readonly ChamberPosition[]; coverageFactor: number }) {
  return (
    <Card title="Places in the chamber" note="Deviation of each place from the reference sensor">
      <DataTable
        name="places"
        rows={positions.map((place) => ({ ...place, uncertaintyText: `± ${plainDigits(place.uncertaintyK)}` }))}
        rowKey="position"
        columns={[
          { key: "position", header: "Place", format: { as: "code" } },
          { key: "deviationK", header: "Deviation", unit: "K", format: { as: "figure", digits: 3, sign: "always" } },
          {
            key: "uncertaintyText",
            header: "Uncertainty",
            unit: `K, k = ${plainDigits(coverageFactor)}`,
            format: { as: "code" },
            align: "right",
          },
        ]}
        empty={{
          title: "No places yet",
          text: "With the deviations of its certificate of uniformity, the uncertainty of a run's temperatures is told place by place.",
        }}
      />
    </Card>
  );
}
