import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { TimeText } from "@/app/_components/time-text";
import { holds, pageContext } from "@/lib/http/page-context";
import { getPackageProvenance, verifyCommands } from "@/lib/services/packages/get-provenance";
import type { PackageView } from "@/schemas/api/packages";
import { actWords } from "../../maker-acts";
import { loadPackage, type PackageParams } from "../load-package";
import { PackageShell } from "../package-shell";
import { Decisions, DerivationCard, DocumentsCard } from "./provenance-cards";
import { RebuildCard } from "./rebuild-card";
import { EventsCard, FilesCard, ReleasesCard, VerifyCard } from "./release-cards";

export const metadata: Metadata = { title: "Provenance of a package" };

export default async function ProvenancePage({ params }: PackageParams) {
  const ctx = await pageContext();
  const view = await loadPackage(ctx, params);
  const provenance = await getPackageProvenance(ctx, view.id);
  const released = view.state === "live" || view.state === "superseded";
  return (
    <PackageShell ctx={ctx} view={view} tab="provenance">
      <div className="grid items-start gap-[18px] xl:grid-cols-[minmax(0,1fr)_400px]">
        <div className="flex min-w-0 flex-col gap-[18px]">
          <DocumentsCard family={provenance.family} layout={provenance.layout} />
          {provenance.derivations.map((derivation) => (
            <DerivationCard key={derivation.id} derivation={derivation} />
          ))}
          <EventsCard events={provenance.events} />
        </div>
        <div className="flex min-w-0 flex-col gap-[18px]">
          <Downloads view={view} auditor={holds(ctx, "auditor")} />
          <PeopleCard view={view} />
          <ReleasesCard releases={provenance.releases} />
          <RebuildCard id={view.id} rebuild={view.rebuild} mayAsk={holds(ctx, "engineer", "reviewer")} />
          <FilesCard files={provenance.files} />
          {released ? (
            <VerifyCard
              commands={verifyCommands}
              keyId={provenance.releases.findLast((one) => one.keyId)?.keyId ?? null}
            />
          ) : null}
        </div>
      </div>
    </PackageShell>
  );
}

function Downloads({ view, auditor }: { view: PackageView; auditor: boolean }) {
  const released = view.state === "live" || view.state === "superseded";
  const withdrawn = view.state === "withdrawn";
  return (
    <Card title="Take it along">
      <div className="flex flex-wrap gap-2.5">
        {withdrawn && !auditor ? null : (
          <LinkButton href={`/api/v1/packages/${view.id}/bundle`} download>
            {released ? "Download bundle" : "Download preview"}
          </LinkButton>
        )}
        <LinkButton
          href={`/api/v1/packages/${view.id}/manifest`}
          download={`manifest-${view.lot}-${view.version}.json`}
        >
          Download manifest
        </LinkButton>
        {released || withdrawn ? <LinkButton href={`/packages/${view.id}/record`}>Release record</LinkButton> : null}
      </div>
      <p className="mt-2 text-sm text-ink-soft">
        {withdrawn
          ? "Withdrawn: its bundle is for auditors only."
          : released
            ? "The bundle is signed and can be checked offline."
            : "Not released: the bundle is a preview, unsigned, and no station takes it."}
      </p>
    </Card>
  );
}

function PeopleCard({ view }: { view: PackageView }) {
  return (
    <Card title="Who made it, who decided">
      <ul className="text-sm">
        {view.makers.map((maker) => (
          <li key={`${maker.name}${maker.act}${maker.at}`} className="py-0.5">
            {maker.name} {actWords(maker.act)}, <TimeText at={maker.at} />
          </li>
        ))}
      </ul>
      <div className="mt-2 text-sm">
        <Decisions decisions={view.approvals} />
      </div>
    </Card>
  );
}
