import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { LotThread } from "@/app/_components/lot-thread";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { listLotPackages } from "@/lib/services/packages/get-package";
import { planPackage } from "@/lib/services/packages/plan-package";
import { listLotProofs } from "@/lib/services/proofs/list-lot-proofs";
import { listLotReinstatements } from "@/lib/services/reinstatements/get-reinstatement";
import { BuildForm } from "./build-form";
import { LiveCard } from "./live-card";
import { PackagesTable } from "./packages-table";
import { OpenReinstatement, PastReinstatements } from "./reinstatements";

interface PageProps {
  params: Promise<{ lot: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Packages of ${decodeURIComponent((await params).lot).toUpperCase()}` };
}

export default async function LotPackagesPage({ params }: PageProps) {
  const ctx = await pageContext();
  const thread = await orNotFound(getLotThread(ctx, decodeURIComponent((await params).lot)));
  const { lot } = thread;
  const packages = (await listLotPackages(ctx, lot, { limit: 1_000 })).items;
  const reinstatements = (await listLotReinstatements(ctx, lot, { limit: 100 })).items;
  const open = reinstatements.find((one) => one.state === "asked");
  const live = packages.find((one) => one.state === "live");
  const proofs = await listLotProofs(ctx, lot);
  const engineer = holds(ctx, "engineer");
  const releases = holds(ctx, "engineer", "reviewer");
  const oneTimeCode = await hasOneTimeCode(ctx);
  const [newest, before] = packages.filter((one) => one.digest !== null);
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Lots", href: "/lots" }, { name: lot, href: `/lots/${lot}` }, { name: "Packages" }]}
        title={`Packages of ${lot}`}
        note="The images of a lot, built from one layout and its approved coefficients"
        actions={
          newest && before ? (
            <LinkButton href={`/compare?from=${before.id}&to=${newest.id}`}>Compare two packages</LinkButton>
          ) : undefined
        }
      />
      <LotThread thread={thread} current="package" />
      <div className="flex flex-col gap-[18px]">
        {open ? <OpenReinstatement request={open} live={live ?? null} oneTimeCode={oneTimeCode} /> : null}
        <LiveCard lot={lot} live={live ?? null} any={packages.length > 0} proof={proofs.live} />
        <Card title="Packages">
          <PackagesTable
            lot={lot}
            rows={packages}
            mayAsk={releases && open === undefined}
            oneTimeCode={oneTimeCode}
            engineer={engineer}
          />
        </Card>
        {engineer ? (
          <div id="build" className="scroll-mt-16">
            <BuildForm lot={lot} plan={await planPackage(ctx, lot)} />
          </div>
        ) : null}
        <PastReinstatements requests={reinstatements.filter((one) => one.state !== "asked")} />
        {engineer || packages.length > 0 ? null : (
          <p className="text-sm text-ink-soft">
            Engineers build packages from approved <Link href={`/lots/${lot}/coefficients`}>coefficients</Link>.
          </p>
        )}
      </div>
    </>
  );
}
