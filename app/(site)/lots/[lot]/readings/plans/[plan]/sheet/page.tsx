import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { MakerMark } from "@/app/_components/frame/maker-mark";
import { PrintButton } from "@/app/_components/print-button";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { formatDateTime, formatDuration } from "@/lib/domain/format/time";
import { soakMinutesOf } from "@/lib/domain/run-plan/run-plan";
import { pageContext } from "@/lib/http/page-context";
import { getRunSheet } from "@/lib/services/run-plans/get-run-sheet";
import { loadPlan, type PlanParams } from "../load-plan";
import { PointsTable } from "../points-table";
import { Cautions } from "./cautions";
import { PointRecord } from "./point-record";
import { Block, EquipmentBoxes, SignatureLines } from "./sheet-parts";

export const metadata: Metadata = { title: "Run sheet" };

/** Printed in ink alone, whatever the screen's colours are. */
const PRINTED =
  "print:border-0 print:bg-transparent print:p-0 print:[--ink-soft:var(--ink)] print:[--rule:var(--ink-faint)]";

/** What stands under every sheet, so that loose ones find together: lot, plan, number. Codes and ids have no sign to escape. */
const pageFooter = (lot: string, plan: string) =>
  `@page { @bottom-left { content: "${lot}, plan ${plan}"; font: 8pt monospace }` +
  ` @bottom-right { content: counter(page) " of " counter(pages); font: 8pt monospace } }`;

export default async function RunSheetPage({ params }: PlanParams) {
  const ctx = await pageContext();
  const { id } = await loadPlan(ctx, params);
  const { plan, family, revision, address, qrSvg } = await getRunSheet(ctx, id);
  const readings = `/lots/${encodeURIComponent(plan.lot)}/readings`;
  return (
    <>
      <div className="print:hidden">
        <TitleRow
          breadcrumb={[
            { name: plan.lot, href: `/lots/${encodeURIComponent(plan.lot)}` },
            { name: "Readings", href: readings },
            { name: plan.name, href: `${readings}/plans/${plan.id}` },
            { name: "Run sheet" },
          ]}
          title="Run sheet"
          note="To take to the chamber; what is written by hand goes into the template"
          actions={
            <>
              <LinkButton href={`/api/v1/run-plans/${plan.id}/template`} download>
                Template to fill in, CSV
              </LinkButton>
              <PrintButton>Print the run sheet</PrintButton>
            </>
          }
        />
      </div>
      <style>{pageFooter(plan.lot, plan.id)}</style>
      <article
        className={`mx-auto max-w-[210mm] rounded border border-rule bg-raised px-6 py-6 text-sm md:px-10 ${PRINTED}`}
      >
        <header className="flex items-start justify-between gap-4 border-b border-ink pb-4">
          <div className="min-w-0">
            <p className="flex items-center gap-2 text-ink-soft">
              <MakerMark /> Trimwright, run sheet
            </p>
            <p className="mt-1 text-lg font-[650] break-words">{plan.name}</p>
            <p>
              {plan.purpose[0]?.toUpperCase()}
              {plan.purpose.slice(1)} run of lot <span className="font-mono">{plan.lot}</span>, family{" "}
              <span className="font-mono">{family}</span> revision {revision}
            </p>
            <p className="text-ink-soft">
              Planned by {plan.createdBy}, {formatDateTime(plan.createdAt)}
            </p>
            <p className="mt-1 font-mono text-xs break-all text-ink-soft">Plan {plan.id}</p>
            {plan.state === "planned" ? null : (
              <p className="mt-1 font-semibold">
                {plan.state === "used" ? "Readings of this plan were uploaded before." : "This plan was dropped."}
              </p>
            )}
          </div>
          {/* biome-ignore lint/performance/noImgElement: an SVG in place, nothing to be optimised */}
          <img
            src={`data:image/svg+xml;utf8,${encodeURIComponent(qrSvg)}`}
            alt={`Code of this plan's page, ${address}`}
            className="size-[26mm] flex-none"
          />
        </header>
        <Cautions />
        <Block
          title="Temperatures and loads"
          note={`${formatCount(plan.rows)} readings, ${formatDuration(soakMinutesOf(plan.points) * 60)} of soak at least`}
        >
          <PointsTable points={plan.points} />
          <p className="mt-1 text-xs text-ink-soft">
            Soak counts from when the chamber stays within 0.5 K by the reference sensor. Read unloaded first, then each
            load after its dwell; the dwell is the same at each temperature.
          </p>
        </Block>
        <EquipmentBoxes equipment={plan.equipment} today={ctx.now().toISOString().slice(0, 10)} />
        {plan.notes ? (
          <Block title="Notes">
            <p className="whitespace-pre-line">{plan.notes}</p>
          </Block>
        ) : null}
        {plan.points.map((point) => (
          <PointRecord key={point.point} point={point} devices={plan.devices} />
        ))}
        <SignatureLines />
      </article>
    </>
  );
}
