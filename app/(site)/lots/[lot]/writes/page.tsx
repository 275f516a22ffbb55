import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { Facts } from "@/app/_components/facts";
import { FirstOffState } from "@/app/_components/first-off";
import { LotThread } from "@/app/_components/lot-thread";
import { Notice } from "@/app/_components/notice";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { WriteRecords } from "@/app/_components/write-records";
import { formatCount } from "@/lib/domain/format/figure";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { listLotProofs } from "@/lib/services/proofs/list-lot-proofs";
import { getWriteProgress, type WriteProgress } from "@/lib/services/stations/get-write-progress";
import { ProgressChart } from "./progress-chart";

interface PageProps {
  params: Promise<{ lot: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Writes of ${decodeURIComponent((await params).lot).toUpperCase()}` };
}

/** How far the writing of a lot has come, what has to be written again, and every record. */
export default async function WritesPage({ params }: PageProps) {
  const ctx = await pageContext();
  const thread = await orNotFound(getLotThread(ctx, decodeURIComponent((await params).lot)));
  const progress = await getWriteProgress(ctx, thread.lot);
  const proofs = await listLotProofs(ctx, thread.lot);
  const path = `/api/v1/lots/${encodeURIComponent(thread.lot)}`;
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: thread.lot, href: `/lots/${thread.lot}` },
          { name: "Written" },
        ]}
        title={`Writes of ${thread.lot}`}
        note="What stations wrote, read back and reported"
        actions={<LinkButton href={`/stations/bench?lot=${encodeURIComponent(thread.lot)}`}>Open the bench</LinkButton>}
      />
      <LotThread thread={thread} current="written" />
      <div className="flex flex-col gap-[18px]">
        <div className="grid grid-cols-1 items-start gap-[18px] lg:grid-cols-[minmax(0,2fr)_minmax(300px,1fr)]">
          <Card title="Devices verified over time">
            {progress.anyPackage.length > 0 ? (
              <ProgressChart progress={progress} />
            ) : (
              <EmptyState title="Nothing verified yet">
                {progress.live
                  ? "Stations that may write this family see the live release. Records stand here as they come in."
                  : "Nothing is live for this lot. Build a package, have it reviewed and release it; then stations can write."}
              </EmptyState>
            )}
          </Card>
          <div className="flex flex-col gap-[18px]">
            <Card title="So far">
              <Counts progress={progress} />
            </Card>
            {proofs.live ? (
              <Card title="First-off" note={`layout ${proofs.live.layout}, firmware ${proofs.live.firmware}`}>
                <FirstOffState proof={proofs.live} lot={thread.lot} />
              </Card>
            ) : null}
          </div>
        </div>
        {progress.live ? (
          <div id="rewrites" className="scroll-mt-16">
            <Rewrites path={path} lot={thread.lot} version={progress.live.version} />
          </div>
        ) : null}
        <Card title="Records">
          <WriteRecords
            endpoint={`${path}/writes`}
            name={`writes of ${thread.lot}`}
            urlName="writes"
            empty={{
              title: "No records yet",
              text: "Stations report each write: what they wrote, what they read back, and how it ended.",
            }}
          />
        </Card>
      </div>
    </>
  );
}

function Counts({ progress: { live, counts } }: { progress: WriteProgress }) {
  return (
    <Facts
      facts={[
        {
          value: live ? `${formatCount(live.verified)} of ${formatCount(live.devices)}` : "—",
          label: live ? (
            <>
              verified with <Link href={`/packages/${live.package}`}>{live.version}</Link>, live
            </>
          ) : (
            "nothing is live"
          ),
        },
        { value: formatCount(counts.records), label: "records" },
        { value: formatCount(counts.otherwise), label: "ended otherwise" },
        { value: formatCount(counts.flagged), label: "flagged" },
        { value: formatCount(counts.stations), label: counts.stations === 1 ? "station" : "stations" },
      ]}
    />
  );
}

function Rewrites({ path, lot, version }: { path: string; lot: string; version: string }) {
  return (
    <Card
      title="Re-write list"
      note={`devices whose last record is not a verified image equal in values to ${version}`}
    >
      <DataTable
        name={`re-write list of ${lot}`}
        urlName="rewrite"
        endpoint={`${path}/rewrites`}
        rowKey="serial"
        rowHref="/trace/{serial}"
        columns={[
          { key: "serial", header: "Serial", format: { as: "code" } },
          { key: "why", header: "Why", format: { as: "state", kind: "rewrite" } },
          { key: "carries", header: "Carries" },
          { key: "lastOutcome", header: "Last write", format: { as: "state", kind: "write-outcome" } },
          { key: "writtenAt", header: "At", format: { as: "time" } },
          { key: "station", header: "Station" },
          { key: "held", header: "Held", format: { as: "yes-no", yes: "held", no: "" } },
          { key: "shipped", header: "Shipped", format: { as: "yes-no", yes: "shipped", no: "" } },
        ]}
        chips={[
          { id: "never", name: "Never written", key: "why", in: ["never-written"] },
          { id: "unknown", name: "Unknown", key: "why", in: ["unknown"] },
          { id: "other", name: "Other values", key: "why", in: ["other-values"] },
          { id: "shipped", name: "Shipped", key: "shipped", in: [true] },
        ]}
        empty={{
          title: "Nothing to write",
          text: "Every device of the live release carries its values, verified. Devices where only a version number differs are not listed.",
        }}
      />
      <div className="mt-3">
        <Notice tone="caution" title="EEPROM cells wear">
          Write only bytes that differ, and only the devices on this list. A held device stays as it is until a second
          person lets it go on; a shipped one is looked at before anything is written.
        </Notice>
      </div>
    </Card>
  );
}
