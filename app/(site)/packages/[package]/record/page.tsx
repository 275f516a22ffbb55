import type { Metadata } from "next";
import Link from "next/link";
import { MakerMark } from "@/app/_components/frame/maker-mark";
import { PrintButton } from "@/app/_components/print-button";
import { SealMark } from "@/app/_components/seal-mark";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import { getPackageProvenance } from "@/lib/services/packages/get-provenance";
import { getReleaseRecord, type ReleaseRecord } from "@/lib/services/packages/get-release-record";
import { verdictOf } from "../check-list";
import { checkName } from "../check-names";
import { loadPackage, type PackageParams } from "../load-package";
import { AcceptedFindings, EquipmentUsed, HexLine, Section, Signature } from "./record-parts";

export const metadata: Metadata = { title: "Release record" };

const kinds = { release: "Released", reinstatement: "Made live again" } as const;

export default async function ReleaseRecordPage({ params }: PackageParams) {
  const ctx = await pageContext();
  const view = await loadPackage(ctx, params);
  const { document: record, sha256, signature } = await orNotFound(getReleaseRecord(ctx, view.id));
  const { family, layout, releases } = await getPackageProvenance(ctx, view.id);
  const stopped = releases.findLast((one) => one.kind === "withdrawal");
  return (
    <>
      <div className="print:hidden">
        <TitleRow
          breadcrumb={[
            { name: view.lot, href: `/lots/${view.lot}` },
            { name: "Packages", href: `/lots/${view.lot}/packages` },
            { name: view.version, href: `/packages/${view.id}` },
            { name: "Release record" },
          ]}
          title="Release record"
          note="One sheet for the file, from what was signed"
          actions={<PrintButton>Print the record</PrintButton>}
        />
      </div>
      <article className="mx-auto max-w-[210mm] rounded border border-rule bg-raised px-6 py-6 text-sm md:px-10 print:border-0 print:bg-transparent print:p-0">
        <header className="flex flex-wrap items-start justify-between gap-4 border-b border-ink pb-4">
          <div>
            <p className="flex items-center gap-2 text-ink-soft">
              <MakerMark /> Trimwright
            </p>
            <p className="mt-1 text-lg font-[650]">
              Release {record.version} of lot <span className="font-mono">{record.lot}</span>
            </p>
            <p className="flex flex-wrap items-center gap-x-3">
              <StateMark {...stateOf("package", view.state)} />
              <span>
                {kinds[record.kind]} {formatDateTime(record.releasedAt)}, sequence {record.sequence}
              </span>
            </p>
          </div>
          <SealMark digest={record.package} below="The same seal stands on screen and at the station" />
        </header>
        {stopped ? (
          <p className="mt-3 border-l-2 border-oxide pl-3 font-semibold text-oxide">
            Withdrawn {formatDateTime(stopped.at)} by {stopped.by}, sequence {stopped.sequence}: {stopped.reason}
          </p>
        ) : null}
        <Section title="What was released">
          <dl className="grid gap-x-6 gap-y-1 sm:grid-cols-[9rem_1fr] print:grid-cols-[9rem_1fr]">
            <Row name="Devices">
              {formatCount(view.counts.devices)} of {formatCount(view.counts.lotDevices)} in the lot
            </Row>
            <Row name="Family">
              {family.code}, revision {family.revision}
            </Row>
            <Row name="Layout">{layout.version}</Row>
            <Row name="Firmware">{view.firmware}</Row>
            <Row name="Built">
              {view.createdBy}, {formatDateTime(view.createdAt)}
            </Row>
            {record.reason ? <Row name="Reason">{record.reason}</Row> : null}
            {view.notes ? <Row name="Notes">{view.notes}</Row> : null}
          </dl>
        </Section>
        <Section title="Signed by">
          {record.approvals.map((one) => (
            <Signature key={one.at} as={one.role} name={one.name} meaning={one.meaning} at={one.at} />
          ))}
          <CoefficientApprovals record={record} />
        </Section>
        <Section title="Checks">
          <ul>
            {view.checks.map((check) => (
              <li key={check.code} className="grid grid-cols-[4.75rem_1fr] gap-x-3 py-0.5">
                <span>
                  <StateMark {...stateOf("check", verdictOf(check, view.waivers))} />
                </span>
                <span>
                  {checkName(check.code)}: {check.message}
                </span>
              </li>
            ))}
          </ul>
          {record.waivers.map((waiver) => (
            <p key={waiver.check} className="mt-1">
              Waived, {checkName(waiver.check)}: {waiver.name}, {formatDateTime(waiver.at)}: “{waiver.reason}”
            </p>
          ))}
        </Section>
        <LeftOut record={record} />
        <AcceptedFindings findings={record.acknowledgements} />
        <EquipmentUsed equipment={record.equipment} />
        <Section title="Digests, SHA-256">
          <HexLine name="Package (manifest.json)" value={record.package} />
          <HexLine name="List of files (SHA256SUMS)" value={record.sums} />
          <HexLine name="What was decided over" value={record.reviewDigest} />
          <HexLine name="Family revision" value={family.sha256} />
          <HexLine name="Layout" value={layout.sha256} />
          <HexLine name="This release (release.json)" value={sha256} />
          <HexLine name="Ledger before it" value={record.ledgerHead} />
          <HexLine name={`Signature, Ed25519, key ${record.keyId}`} value={signature} />
        </Section>
        <footer className="mt-5 border-t border-rule pt-3 text-xs text-ink-soft">
          Shown for {ctx.actor.name}, {formatDateTime(ctx.now())}. The proof is the signed bundle, not this sheet; how
          to check it stands in its VERIFY.txt
          <span className="print:hidden">
            {" "}
            and under <Link href={`/packages/${view.id}/provenance`}>Provenance</Link>
          </span>
          . Weighing instruments used in trade are under legal metrology; a class is proven by type approval and
          verification under the local rules.
        </footer>
      </article>
    </>
  );
}

function Row({ name, children }: { name: string; children: React.ReactNode }) {
  return (
    <>
      <dt className="text-ink-soft">{name}</dt>
      <dd>{children}</dd>
    </>
  );
}

function CoefficientApprovals({ record }: { record: ReleaseRecord }) {
  return record.coefficientApprovals.map((one) => (
    <Signature key={`${one.derivation}${one.at}`} name={one.name} as="coefficients" meaning={one.meaning} at={one.at} />
  ));
}

function LeftOut({ record }: { record: ReleaseRecord }) {
  if (record.exclusions.length === 0) return null;
  return (
    <Section title="Left out of the sample">
      <ul>
        {record.exclusions.map((one) => (
          <li key={`${one.derivation}${one.serial}`}>
            <span className="font-mono">{one.serial}</span>, {one.name}: {one.reason}
          </li>
        ))}
      </ul>
    </Section>
  );
}
