import type { Metadata } from "next";
import Link from "next/link";
import { Card } from "@/app/_components/card";
import { ComparisonSummary } from "@/app/_components/difference/comparison-summary";
import { ComparisonView } from "@/app/_components/difference/comparison-view";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import { getLayout } from "@/lib/services/layouts/get-layout";
import { chooseAgainst } from "@/lib/services/packages/choose-against";
import { getPackageView } from "@/lib/services/packages/get-package";
import { id as packageId } from "@/schemas/api/common";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { loadPackage, type PackageParams } from "../load-package";
import { PackageShell } from "../package-shell";
import { AgainstChoice } from "./against-choice";
import { SeenDifferences } from "./seen-differences";

export const metadata: Metadata = { title: "Differences of a package" };

const reasons = {
  live: "what is live now",
  "live-before": "what was live before it",
  "built-before": "the one built before it; nothing is live",
  none: "",
} as const;

interface PageProps extends PackageParams {
  searchParams: Promise<{ against?: string; serial?: string }>;
}

export default async function DifferencesPage({ params, searchParams }: PageProps) {
  const ctx = await pageContext();
  const view = await loadPackage(ctx, params);
  const { against: wanted, serial } = await searchParams;
  if (view.digest === null) {
    return (
      <PackageShell ctx={ctx} view={view} tab="differences">
        {null}
      </PackageShell>
    );
  }
  const choice = await chooseAgainst(ctx, view.id);
  const against = packageId.safeParse(wanted).data ?? choice.chosen?.id;
  if (against === undefined) {
    return (
      <PackageShell ctx={ctx} view={view} tab="differences">
        <Card title="Nothing to compare with">
          <p className="text-sm text-ink-soft">
            No other package of {view.lot} was built: all {view.counts.devices} devices are new, with the values under{" "}
            <Link href={`/packages/${view.id}`}>Contents</Link>.
          </p>
        </Card>
        <SeenDifferences reviewDigest={view.reviewDigest} />
      </PackageShell>
    );
  }
  const from = await orNotFound(getPackageView(ctx, against));
  const layout = (await getLayout(ctx, { family: view.family, version: view.layout }))
    .document as unknown as LayoutDocument;
  return (
    <PackageShell ctx={ctx} view={view} tab="differences">
      <Card
        title={
          <>
            What changes from <Link href={`/packages/${from.id}`}>{from.version}</Link> to {view.version}
          </>
        }
        note={against === choice.chosen?.id ? `against ${reasons[choice.reason]}` : undefined}
        aside={<AgainstChoice options={choice.others} chosen={against} />}
      >
        <ComparisonSummary key={against} from={against} to={view.id} layout={layout} />
        {from.layout !== view.layout ? (
          <p className="mt-3 text-sm">
            The layout changes too:{" "}
            <Link href={`/compare?family=${view.family}&fromLayout=${from.layout}&toLayout=${view.layout}`}>
              {from.layout} → {view.layout}
            </Link>
          </p>
        ) : null}
      </Card>
      <ComparisonView key={against} from={against} to={view.id} layout={layout} serial={serial?.toUpperCase()} />
      {choice.reason !== "live" || against === choice.chosen?.id ? (
        <SeenDifferences reviewDigest={view.reviewDigest} />
      ) : null}
    </PackageShell>
  );
}
