import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { Facts } from "@/app/_components/facts";
import { FindingsList } from "@/app/_components/findings-list";
import { Notice } from "@/app/_components/notice";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";
import { formatSize } from "@/lib/domain/format/size";
import { formatDate, formatDateTime } from "@/lib/domain/format/time";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { listRunUses } from "@/lib/services/derivations/get-derivation";
import { getProofRun } from "@/lib/services/proofs/judge-proof-run";
import { countStaleSets } from "@/lib/services/runs/count-stale-sets";
import { getRunView } from "@/lib/services/runs/get-run";
import { ProofCard } from "./proof-card";

export const metadata: Metadata = { title: "Run" };

export default async function RunPage({ params }: { params: Promise<{ run: string }> }) {
  const ctx = await pageContext();
  const run = await orNotFound(getRunView(ctx, (await params).run));
  const uses = await listRunUses(ctx, run.id);
  const proof = run.purpose === "proof" ? await getProofRun(ctx, run.id) : null;
  const stale = await countStaleSets(ctx, run.id);
  const staleCount = [...stale.values()].reduce((sum, count) => sum + count, 0);
  const path = `/api/v1/runs/${run.id}`;
  const readings = `/lots/${encodeURIComponent(run.lot)}/readings`;
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: run.lot, href: `/lots/${run.lot}` },
          { name: "Readings", href: `/lots/${run.lot}/readings` },
          { name: "Run" },
        ]}
        title={`${run.purpose[0]?.toUpperCase()}${run.purpose.slice(1)} run of ${formatDateTime(run.createdAt)}`}
        state={
          run.supersededBy
            ? { tone: "caution", word: "superseded", title: "Another run replaced it" }
            : { tone: "good", word: "counts" }
        }
        note={`Uploaded by ${run.createdBy}${run.fileName ? ` from ${run.fileName}` : ""}`}
        actions={
          <>
            {run.supersededBy === null && holds(ctx, "engineer") ? (
              <LinkButton href={`${readings}?supersedes=${run.id}#upload`}>Replace with a corrected file</LinkButton>
            ) : null}
            <LinkButton href={`${path}/file`} download>
              File as uploaded
            </LinkButton>
          </>
        }
      />
      <div className="flex flex-col gap-[18px]">
        {run.supersededBy ? (
          <Notice tone="caution" title="Superseded">
            <Link href={`/runs/${run.supersededBy}`}>Another run</Link> replaced it.{" "}
            {staleCount > 0
              ? `${formatNumberOf(staleCount, "coefficient set")} that ${staleCount === 1 ? "rests" : "rest"} on it became stale: derive anew.`
              : "No coefficients rested on it."}
          </Notice>
        ) : null}
        {run.supersedes ? (
          <Notice>
            It replaces <Link href={`/runs/${run.supersedes}`}>an earlier run</Link>: {run.reason}
          </Notice>
        ) : null}
        {run.plan ? (
          <Notice>
            Read as planned in <Link href={`${readings}/plans/${run.plan.id}`}>{run.plan.name}</Link>; what differs
            stands among the findings.
          </Notice>
        ) : null}
        <Card title="What it holds">
          <Facts
            facts={[
              { value: formatCount(run.devices), label: "devices" },
              { value: formatCount(run.rows), label: "readings" },
              {
                value: `${formatQuantity("temperature", run.temperatureLowC)} to ${formatQuantity("temperature", run.temperatureHighC)}`,
                label: "°C by the reference sensor",
              },
              { value: formatSize(run.bytes), label: "as uploaded" },
            ]}
          />
          <div className="mt-4">
            <Digest value={run.sha256} name="digest of the file" />
          </div>
          {run.sourceSha256 ? (
            <div className="mt-2">
              <p className="text-xs text-ink-soft">
                Made in the browser, by column mapping, from a file of this digest
              </p>
              <Digest value={run.sourceSha256} name="digest of the file it was made from" />
            </div>
          ) : null}
          {run.equipment.length > 0 ? (
            <ul className="mt-3 text-sm">
              {run.equipment.map((one) => (
                <li key={one.code}>
                  <span className="font-mono">{one.code}</span>, {one.kind}, certificate {one.certificate}, due{" "}
                  {formatDate(one.calibratedUntil)}
                </li>
              ))}
            </ul>
          ) : null}
        </Card>
        {proof ? <ProofCard proof={proof} /> : null}
        <Card title="Findings" note="What the family's rules and the certificates say about it">
          <FindingsList findings={run.findings} empty="Nothing to remark." />
        </Card>
        {proof ? null : (
          <Card title="Used by">
            {uses.length === 0 ? (
              <p className="text-sm text-ink-soft">
                No derivation yet. <Link href={`/lots/${run.lot}/coefficients`}>Derive coefficients</Link> from it.
              </p>
            ) : (
              <ul className="text-sm">
                {uses.map((use) => (
                  <li key={use.id}>
                    <Link href={`/derivations/${use.id}`}>Derivation of {formatDateTime(use.createdAt)}</Link>,{" "}
                    {use.method}, order {use.order}, {use.state.replaceAll("-", " ")},{" "}
                    {formatNumberOf(use.withValues, "set")}
                    {stale.has(use.id) ? `, ${formatCount(stale.get(use.id))} of them stale` : ""}
                  </li>
                ))}
              </ul>
            )}
          </Card>
        )}
        <Card title="Readings">
          <DataTable
            name="readings"
            endpoint={`${path}/readings`}
            total={run.rows}
            rowKey="row"
            columns={[
              { key: "row", header: "Row", title: "Line of the file, the header being 1", format: { as: "count" } },
              { key: "serial", header: "Serial", format: { as: "link", href: "/trace/{serial}" } },
              { key: "point", header: "Point", format: { as: "figure", digits: 0 } },
              { key: "chamberC", header: "Chamber", unit: "°C", format: { as: "figure", digits: 3 } },
              { key: "soakMin", header: "Soak", unit: "min", format: { as: "figure", digits: 1 } },
              {
                key: "deviceTemp",
                header: "Device temperature",
                unit: "own unit",
                format: { as: "figure", digits: 2 },
              },
              { key: "loadKg", header: "Load", format: { as: "quantity", name: "load" } },
              { key: "signalMvV", header: "Signal", unit: "mV/V", format: { as: "figure", digits: 7 } },
              { key: "takenAt", header: "Taken", format: { as: "time" } },
              { key: "position", header: "Position", hidden: true },
              { key: "hardwareId", header: "Board", hidden: true },
              { key: "dwellS", header: "Dwell", unit: "s", format: { as: "figure", digits: 1 }, hidden: true },
              {
                key: "outputMvV",
                header: "Output",
                unit: "mV/V",
                format: { as: "figure", digits: 7 },
                hidden: run.purpose !== "proof",
              },
            ]}
            empty={{ title: "No readings" }}
          />
        </Card>
      </div>
    </>
  );
}
