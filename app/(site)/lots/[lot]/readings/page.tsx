import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { LotThread } from "@/app/_components/lot-thread";
import { Notice } from "@/app/_components/notice";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { listEquipment } from "@/lib/services/equipment/keep-equipment";
import { getLot } from "@/lib/services/lots/get-lot";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { getRulesOfLot } from "@/lib/services/lots/lot-rules";
import { getReadingMapping } from "@/lib/services/reading-mappings/keep-reading-mapping";
import { listRunPlans } from "@/lib/services/run-plans/get-run-plan";
import { listLotRuns } from "@/lib/services/runs/get-run";
import type { RunView } from "@/schemas/api/runs";
import { PlannedRuns } from "./planned-runs";
import { UploadPanel } from "./upload-panel";

export const metadata: Metadata = { title: "Readings" };

/** A run as the table shows it. */
function rowOf(run: RunView) {
  return {
    ...run,
    counted: run.supersededBy === null,
    equipmentCodes: run.equipment.map((one) => one.code),
    open: run.findings.filter((finding) => finding.severity !== "note").length,
    notes: run.findings.filter((finding) => finding.severity === "note").length,
  };
}

interface PageProps {
  params: Promise<{ lot: string }>;
  /** What a link chose to upload for: a planned run, or a run to replace. */
  searchParams: Promise<{ plan?: string; supersedes?: string }>;
}

export default async function ReadingsPage({ params, searchParams }: PageProps) {
  const ctx = await pageContext();
  const { plan, supersedes } = await searchParams;
  const lot = decodeURIComponent((await params).lot);
  const thread = await orNotFound(getLotThread(ctx, lot));
  const { items } = await listLotRuns(ctx, thread.lot, { limit: 1_000 });
  const runs = items.map(rowOf);
  const plans = (await listRunPlans(ctx, { lot: thread.lot, limit: 1_000 })).items;
  const isEngineer = holds(ctx, "engineer");
  const { family } = await getLot(ctx, thread.lot);
  const rules = await getRulesOfLot(ctx, thread.lot);
  const kept = (await getReadingMapping(ctx, family)).mapping;
  const equipment = isEngineer ? (await listEquipment(ctx, { limit: 1_000 })).items : [];
  const today = ctx.now().toISOString().slice(0, 10);
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: thread.lot, href: `/lots/${thread.lot}` },
          { name: "Readings" },
        ]}
        title={`Readings of ${thread.lot}`}
        note="Thermal runs: one chamber session each, kept as uploaded"
        actions={
          isEngineer ? (
            <LinkButton href={`/lots/${encodeURIComponent(thread.lot)}/readings/plan`} look="outline">
              Plan a run
            </LinkButton>
          ) : undefined
        }
      />
      <LotThread thread={thread} current="readings" />
      <div className="flex flex-col gap-[18px]">
        <PlannedRuns plans={plans} />
        <Card title="Runs">
          <DataTable
            name="runs"
            rows={runs}
            rowKey="id"
            rowHref="/runs/{id}"
            columns={[
              { key: "createdAt", header: "Uploaded", format: { as: "time" } },
              { key: "purpose", header: "Purpose" },
              { key: "temperatureLowC", header: "Lowest", format: { as: "quantity", name: "temperature" } },
              { key: "temperatureHighC", header: "Highest", format: { as: "quantity", name: "temperature" } },
              { key: "devices", header: "Devices", format: { as: "count" } },
              { key: "rows", header: "Readings", format: { as: "count" } },
              { key: "equipmentCodes", header: "Equipment" },
              {
                key: "open",
                header: "Findings",
                title: "Findings that block or need a reason",
                format: { as: "count" },
              },
              { key: "notes", header: "Notes", format: { as: "count" } },
              { key: "counted", header: "Counts", format: { as: "yes-no", yes: "yes", no: "no, superseded" } },
              { key: "createdBy", header: "By" },
              { key: "fileName", header: "File", hidden: true },
              { key: "sha256", header: "Digest", format: { as: "digest" }, hidden: true },
            ]}
            chips={[
              { id: "findings", name: "With findings", key: "open", above: 0 },
              { id: "superseded", name: "Superseded", key: "counted", in: [false] },
            ]}
            empty={{
              title: "No readings yet",
              text: isEngineer
                ? "Plan a run, or upload the readings of a chamber session below: a sample run for an individual or a pooled-gain trim, then zero, span and verification runs."
                : "An engineer uploads the readings of a chamber session here.",
            }}
          />
        </Card>
        {isEngineer ? (
          <>
            <div id="upload" className="scroll-mt-20">
              <UploadPanel
                key={`${plan} ${supersedes}`}
                lot={thread.lot}
                family={family}
                rules={rules}
                kept={kept}
                start={{ plan, supersedes }}
                plans={plans
                  .filter((one) => one.state === "planned")
                  .map(({ id, name, purpose, equipmentCodes }) => ({ id, name, purpose, equipment: equipmentCodes }))}
                equipment={equipment.map(({ code, kind, calibratedUntil }) => ({
                  code,
                  kind,
                  calibratedUntil,
                  overdue: calibratedUntil < today,
                }))}
                runs={runs
                  .filter((run) => run.counted)
                  .map((run) => ({
                    id: run.id,
                    purpose: run.purpose,
                    createdAt: run.createdAt,
                    devices: run.devices,
                    planId: run.plan?.id ?? null,
                  }))}
              />
            </div>
            <Notice tone="caution" title="At the chamber">
              Surfaces are hot or cold, loads hang or stand high, and a cold device draws moisture: let it warm up
              before it is switched on. The procedures of your site come first.
            </Notice>
          </>
        ) : null}
      </div>
    </>
  );
}
