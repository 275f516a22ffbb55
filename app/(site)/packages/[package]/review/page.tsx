import type { Metadata } from "next";
import Link from "next/link";
import { Card } from "@/app/_components/card";
import { pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { meaningOfDecision } from "@/lib/services/packages/decide-package";
import type { PackageView } from "@/schemas/api/packages";
import { actWords } from "../../maker-acts";
import { CheckList } from "../check-list";
import { loadPackage, type PackageParams } from "../load-package";
import { PackageShell } from "../package-shell";
import { Decisions } from "../provenance/provenance-cards";
import { DecisionPanel } from "./decision-panel";
import { WhatChanges } from "./what-changes";
import { WhoMaySign } from "./who-may-sign";

export const metadata: Metadata = { title: "Review of a package" };

export default async function ReviewPage({ params }: PackageParams) {
  const ctx = await pageContext();
  const view = await loadPackage(ctx, params);
  const decides = view.state === "in-review" && view.mayDecide && view.digest !== null && view.reviewDigest !== null;
  return (
    <PackageShell
      ctx={ctx}
      view={view}
      tab="review"
      title={view.state === "in-review" ? `Review release ${view.version}` : undefined}
    >
      <div className="grid items-start gap-[18px] xl:grid-cols-[minmax(0,1fr)_380px]">
        <div className="flex min-w-0 flex-col gap-[18px]">
          <WhatChanges ctx={ctx} view={view} />
        </div>
        <div className="flex min-w-0 flex-col gap-[18px]">
          {decides ? (
            <DecisionPanel
              id={view.id}
              version={view.version}
              digest={view.digest as string}
              reviewDigest={view.reviewDigest as string}
              statement={meaningOfDecision("approve", { version: view.version, lotCode: view.lot })}
              name={ctx.actor.name}
              makers={makersOf(view)}
              waived={view.waivers.length}
              oneTimeCode={await hasOneTimeCode(ctx)}
            />
          ) : null}
          {view.approvals.length > 0 ? (
            <Card title="Decided so far">
              <div className="text-sm">
                <Decisions decisions={view.approvals} />
              </div>
            </Card>
          ) : null}
          {decides ? null : <WhoMaySign view={view} me={ctx.actor.name} makers={makersOf(view)} />}
          <Card title={`${view.checks.length} checks`}>
            <CheckList checks={view.checks} waivers={view.waivers} />
            <p className="mt-2 text-sm">
              <Link href={`/packages/${view.id}/checks`}>All checks and evidence</Link>
            </p>
          </Card>
        </div>
      </div>
    </PackageShell>
  );
}

export interface MakerActs {
  name: string;
  acts: string[];
}

/** Everybody who had a hand in the package, each with what they did, in words. */
function makersOf({ makers }: PackageView): MakerActs[] {
  const byName = new Map<string, Set<string>>();
  for (const { name, act } of makers) byName.set(name, (byName.get(name) ?? new Set()).add(actWords(act)));
  return [...byName].map(([name, acts]) => ({ name, acts: [...acts] }));
}
