import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { LotThread } from "@/app/_components/lot-thread";
import { Notice } from "@/app/_components/notice";
import { Progress } from "@/app/_components/progress";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount, formatGiven } from "@/lib/domain/format/figure";
import { formatDate } from "@/lib/domain/format/time";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getDerivationView } from "@/lib/services/derivations/get-derivation";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import type { DerivationView } from "@/schemas/api/derivations";
import { Origin } from "./origin";
import { Result } from "./result";

export const metadata: Metadata = { title: "Derivation" };

const ROLE_WORDS: Record<string, string> = { zero: "zero-only" };

/** One line: how, from how many devices of each role, proven where. */
function noteOf({ method, order, counts, provenRange }: DerivationView): string {
  const roles = Object.entries(counts.roles).map(
    ([role, count]) => `${formatCount(count)} ${ROLE_WORDS[role] ?? role}`,
  );
  const proven = provenRange ? `proven ${formatGiven(provenRange[0])} to ${formatGiven(provenRange[1])} °C` : "";
  return [`${method}, order ${order}`, roles.join(", "), proven].filter(Boolean).join(" · ");
}

export default async function DerivationPage({ params }: { params: Promise<{ derivation: string }> }) {
  const ctx = await pageContext();
  const view = await orNotFound(getDerivationView(ctx, (await params).derivation));
  const thread = await getLotThread(ctx, view.lot);
  const title = `${view.method === "import" ? "Import" : "Derivation"} of ${formatDate(view.createdAt)}`;
  const decides = view.mayDecide && (view.counts.states.proposed ?? 0) > 0;
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
        actions={
          <>
            <LinkButton href={`/derivations/compare?to=${view.id}`}>Compare</LinkButton>
            {decides ? (
              <LinkButton href="#decision" look="primary">
                Decide
              </LinkButton>
            ) : holds(ctx, "engineer") && view.method !== "import" ? (
              <LinkButton href={`/lots/${view.lot}/coefficients?like=${view.id}`} look="outline">
                Try other options
              </LinkButton>
            ) : null}
          </>
        }
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
            <Link href={`/lots/${view.lot}/coefficients?like=${view.id}`}>derive with other runs or options</Link>.
          </Notice>
        ) : null}
        {view.finishedAt && !view.failure ? <Result view={view} /> : null}
        <Origin view={view} />
      </div>
    </>
  );
}
