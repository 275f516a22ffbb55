import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FindingsList } from "@/app/_components/findings-list";
import { LegalNote } from "@/app/_components/legal-note";
import { LotThread } from "@/app/_components/lot-thread";
import { Notice } from "@/app/_components/notice";
import { PooledFacts } from "@/app/_components/pooled-facts";
import { Progress } from "@/app/_components/progress";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { formatDate } from "@/lib/domain/format/time";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { getDerivationView } from "@/lib/services/derivations/get-derivation";
import { getDerivationChart } from "@/lib/services/derivations/get-derivation-chart";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import type { DerivationView } from "@/schemas/api/derivations";
import { DerivationCharts } from "./charts";
import { DecisionPanel } from "./decision-panel";
import { DevicesCard } from "./devices-card";
import { Origin } from "./origin";
import { VerificationCard } from "./verification-card";

export const metadata: Metadata = { title: "Derivation" };

const SHOWN_FINDINGS = 200;

/** One line: how, from how many devices of each role, proven where. */
function noteOf({ method, order, counts, provenRange }: DerivationView): string {
  const roles = Object.entries(counts.roles).map(([role, count]) => `${formatCount(count)} ${role}`);
  const proven = provenRange ? `proven ${provenRange[0]} to ${provenRange[1]} °C` : "";
  return [`${method}, order ${order}`, roles.join(", "), proven].filter(Boolean).join(" · ");
}

export default async function DerivationPage({ params }: { params: Promise<{ derivation: string }> }) {
  const ctx = await pageContext();
  const view = await orNotFound(getDerivationView(ctx, (await params).derivation));
  const thread = await getLotThread(ctx, view.lot);
  const title = `${view.method === "import" ? "Import" : "Derivation"} of ${formatDate(view.createdAt)}`;
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: view.lot, href: `/lots/${view.lot}` },
          { name: "Coefficients", href: `/lots/${view.lot}/coefficients` },
          { name: "Derivation" },
        ]}
        title={title}
        state={stateOf("derivation", view.state)}
        note={noteOf(view)}
        actions={<LinkButton href={`/lots/${view.lot}/coefficients`}>Try other options</LinkButton>}
      />
      <LotThread thread={thread} current="coefficients" />
      <div className="flex flex-col gap-[18px]">
        {view.state === "working" ? (
          <Card title="Being computed">
            <Progress
              label="Derivation"
              endpoint={`/api/v1/derivations/${view.id}`}
              running={["working"]}
              initial={view.progress}
            />
          </Card>
        ) : null}
        {view.failure ? (
          <Notice tone="bad" title="The derivation did not finish">
            {view.failure.message} <span className="font-mono text-xs">{view.failure.code}</span> Nothing was stored;{" "}
            <Link href={`/lots/${view.lot}/coefficients`}>derive with other runs or options</Link>.
          </Notice>
        ) : null}
        {view.finishedAt && !view.failure ? await resultOf(view) : null}
        <Origin view={view} />
      </div>
    </>
  );

  async function resultOf(shown: DerivationView) {
    const chart = await getDerivationChart(ctx, shown.id);
    const noFreedom = shown.findings.some((finding) => finding.code === "fit.no_freedom");
    return (
      <>
        {shown.method === "import" ? null : <DerivationCharts view={shown} {...chart} />}
        {shown.pooled ? (
          <Card title="The lot's gain coefficient">
            <PooledFacts pooled={shown.pooled} />
          </Card>
        ) : null}
        <Card title="Findings" note="What blocks, what needs a reason, what is good to know">
          <FindingsList findings={shown.findings.slice(0, SHOWN_FINDINGS)} empty="No findings." />
          {shown.findings.length > SHOWN_FINDINGS ? (
            <p className="mt-2 text-sm text-ink-soft">
              The first {SHOWN_FINDINGS}; the others stand with their devices below.
            </p>
          ) : null}
        </Card>
        <VerificationCard results={shown.verification} />
        <DevicesCard id={shown.id} noFreedom={noFreedom} order={shown.order} />
        {shown.method === "import" ? null : <LegalNote />}
        <DecisionPanel view={shown} isReviewer={holds(ctx, "reviewer")} oneTimeCode={await hasOneTimeCode(ctx)} />
      </>
    );
  }
}
