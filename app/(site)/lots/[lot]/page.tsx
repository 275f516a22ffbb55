import type { Metadata } from "next";
import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { LotThread } from "@/app/_components/lot-thread";
import { stateOf } from "@/app/_components/state/state-of";
import { DataTable } from "@/app/_components/table/data-table";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getLot } from "@/lib/services/lots/get-lot";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { AddSerials } from "./add-serials";

interface PageProps {
  params: Promise<{ lot: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Lot ${decodeURIComponent((await params).lot).toUpperCase()}` };
}

export default async function LotPage({ params }: PageProps) {
  const ctx = await pageContext();
  const lot = await orNotFound(getLot(ctx, decodeURIComponent((await params).lot)));
  const thread = await getLotThread(ctx, lot.code);
  const engineer = holds(ctx, "engineer");
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Lots", href: "/lots" }, { name: lot.code }]}
        title={lot.code}
        code
        state={stateOf("lot", lot.state)}
        note={
          <>
            made by {lot.createdBy}, <TimeText at={lot.createdAt} />
          </>
        }
      />
      <LotThread thread={thread} current="serials" />
      <div className="flex flex-col gap-[18px]">
        <Card>
          <Facts
            facts={[
              { value: formatCount(lot.devices), label: "devices" },
              {
                value: <Link href={`/families/${lot.family}?revision=${lot.revision}`}>{lot.family}</Link>,
                label: `family, revision ${lot.revision}`,
              },
              { value: lot.firmware, label: "firmware" },
              { value: formatCount(lot.sequence), label: "changes of what is live" },
            ]}
          />
        </Card>
        {engineer ? <AddSerials lot={lot.code} open={lot.devices === 0} /> : null}
        <Card title="Serials">
          <DataTable
            name={`serials of ${lot.code}`}
            endpoint={`/api/v1/lots/${lot.code}/devices`}
            total={lot.devices}
            rowKey="serial"
            rowHref="/trace/{serial}"
            columns={[
              { key: "serial", header: "Serial", format: { as: "code" } },
              { key: "state", header: "Device", format: { as: "state", kind: "device" } },
              { key: "coefficients", header: "Coefficients", format: { as: "state", kind: "coefficient-set" } },
              {
                key: "hardwareId",
                header: "Board",
                format: { as: "code" },
                title: "Hardware id of the board in it, as last reported",
              },
              { key: "gaugeBatch", header: "Gauge batch", format: { as: "code" }, title: "Of its strain gauges" },
              {
                key: "materialBatch",
                header: "Material batch",
                format: { as: "code" },
                title: "Of its body's material",
              },
              { key: "addedAt", header: "Added", format: { as: "time" } },
            ]}
            chips={[
              { id: "held", name: "Held", key: "state", in: ["held"] },
              { id: "scrapped", name: "Scrapped", key: "state", in: ["scrapped"] },
              { id: "bare", name: "Without coefficients", key: "coefficients", in: [null] },
            ]}
            empty={{
              title: "No serials yet",
              text: engineer
                ? "Add them above: pasted from a list, from a table with their batches, or numbered by a rule. Then a temperature test can be uploaded."
                : "An engineer adds them.",
            }}
          />
        </Card>
      </div>
    </>
  );
}
