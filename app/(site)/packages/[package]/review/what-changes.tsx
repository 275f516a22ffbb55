import Link from "next/link";
import { Card } from "@/app/_components/card";
import { ComparisonSummary } from "@/app/_components/difference/comparison-summary";
import { formatCount } from "@/lib/domain/format/figure";
import { formatDate } from "@/lib/domain/format/time";
import type { PersonCtx } from "@/lib/services/context";
import { getLayout } from "@/lib/services/layouts/get-layout";
import { type Against, chooseAgainst } from "@/lib/services/packages/choose-against";
import { getPackageView } from "@/lib/services/packages/get-package";
import type { PackageView } from "@/schemas/api/packages";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { contentFields } from "../content-fields";
import { ContentsTable } from "../contents-table";
import { OpenDifferences } from "./open-differences";

/** What a package changes against what is live, in figures, and the differences themselves once they are opened. */
export async function WhatChanges({ ctx, view }: { ctx: PersonCtx; view: PackageView }) {
  const { chosen, reason } = await chooseAgainst(ctx, view.id);
  const layout = (await getLayout(ctx, { family: view.family, version: view.layout }))
    .document as unknown as LayoutDocument;
  const reviewDigest = view.state === "in-review" ? view.reviewDigest : null;
  if (!chosen) {
    return (
      <>
        <Card title="The first package of the lot">
          <p>No package was built before it: all {formatCount(view.counts.devices)} devices are new.</p>
          <Why view={view} />
        </Card>
        <OpenDifferences reviewDigest={reviewDigest} words="Open the values of all devices">
          <Card title="Images" note="Values as decoded from the bytes">
            <ContentsTable id={view.id} devices={view.counts.devices} fields={contentFields(layout)} />
          </Card>
        </OpenDifferences>
      </>
    );
  }
  const from = await getPackageView(ctx, chosen.id);
  return (
    <>
      <Card title={titleOf(chosen, reason)}>
        <ComparisonSummary from={chosen.id} to={view.id} layout={layout} />
        {from.layout === view.layout ? null : (
          <p className="mt-3 text-sm">
            The layout changes too:{" "}
            <Link href={`/compare?family=${view.family}&fromLayout=${from.layout}&toLayout=${view.layout}`}>
              {from.layout} → {view.layout}
            </Link>
          </p>
        )}
        <Why view={view} />
      </Card>
      <OpenDifferences
        reviewDigest={reviewDigest}
        words={`Open the differences to ${chosen.version}`}
        comparison={{ from: chosen.id, to: view.id, layout }}
      />
    </>
  );
}

function titleOf(chosen: NonNullable<Against["chosen"]>, reason: Against["reason"]): string {
  if (reason === "live" && chosen.liveSince) {
    return `What changes against ${chosen.version}, live since ${formatDate(chosen.liveSince)}`;
  }
  if (reason === "live-before") return `What changed against ${chosen.version}, which was live before it`;
  return `What changes against ${chosen.version}; nothing is live`;
}

function Why({ view }: { view: PackageView }) {
  if (!view.notes) return null;
  return <p className="mt-3 text-sm whitespace-pre-line text-ink-soft">Why: {view.notes}</p>;
}
