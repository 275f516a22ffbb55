import Link from "next/link";
import type { ReactNode } from "react";
import { Card } from "@/app/_components/card";
import { LotThread } from "@/app/_components/lot-thread";
import { Notice } from "@/app/_components/notice";
import { Progress } from "@/app/_components/progress";
import { SealMark } from "@/app/_components/seal-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TabLinks } from "@/app/_components/tab-links";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import type { PersonCtx } from "@/lib/services/context";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { findWithdrawal } from "@/lib/services/packages/get-provenance";
import { listLotReinstatements } from "@/lib/services/reinstatements/get-reinstatement";
import type { PackageView } from "@/schemas/api/packages";
import { PackageActions } from "./package-actions";
import { hindranceOf, movesOf } from "./package-moves";

export type PackageTab = "contents" | "checks" | "differences" | "review" | "provenance";

export interface PackageShellProps {
  ctx: PersonCtx;
  view: PackageView;
  tab: PackageTab;
  title?: string;
  children: ReactNode;
}

/** What every page of a package shows: title row, thread of its lot, its parts as links, and how its build goes. */
export async function PackageShell({ ctx, view, tab, title, children }: PackageShellProps) {
  const thread = await getLotThread(ctx, view.lot);
  const [newest] = (await listLotReinstatements(ctx, view.lot, { limit: 1 })).items;
  const actions = movesOf(view, ctx.actor.roles, newest?.state === "asked").filter(
    // The review page has its own signing panel.
    (action) => !(tab === "review" && "href" in action && action.href.endsWith("/review")),
  );
  const built = view.digest !== null;
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: view.lot, href: `/lots/${view.lot}` },
          { name: "Packages", href: `/lots/${view.lot}/packages` },
          { name: view.version },
        ]}
        title={title ?? `Package ${view.version}`}
        state={stateOf("package", view.state)}
        seal={view.digest ? <SealMark digest={view.digest} look="inline" /> : undefined}
        note={
          <>
            built by {view.createdBy}, <TimeText at={view.createdAt} /> · layout {view.layout} · firmware{" "}
            {view.firmware}
            {view.sequence === null ? "" : ` · sequence ${view.sequence}`}
          </>
        }
        actions={
          actions.length > 0 ? (
            <PackageActions
              id={view.id}
              lot={view.lot}
              version={view.version}
              actions={actions}
              oneTimeCode={await hasOneTimeCode(ctx)}
            />
          ) : undefined
        }
      />
      <LotThread thread={thread} current={tab === "review" ? "review" : "package"} />
      {built ? <PackageTabs view={view} tab={tab} /> : null}
      <div className="flex flex-col gap-[18px]">
        <BuildState view={view} />
        {view.state === "withdrawn" ? <Withdrawn withdrawal={await findWithdrawal(ctx, view.id)} /> : null}
        <WhatIsDue view={view} tab={tab} engineer={ctx.actor.roles.includes("engineer")} />
        {built ? children : null}
      </div>
    </>
  );
}

function PackageTabs({ view, tab }: { view: PackageView; tab: PackageTab }) {
  const base = `/packages/${view.id}`;
  const address = (name: PackageTab) => (name === "contents" ? base : `${base}/${name}`);
  const count = (shown: number) => <span className="font-mono text-xs">{formatCount(shown)}</span>;
  return (
    <TabLinks
      label={`Parts of package ${view.version}`}
      current={address(tab)}
      links={[
        { href: address("contents"), name: "Contents", note: count(view.counts.devices) },
        { href: address("checks"), name: "Checks", note: count(view.checks.length) },
        { href: address("differences"), name: "Differences" },
        { href: address("review"), name: "Review" },
        { href: address("provenance"), name: "Provenance" },
      ]}
    />
  );
}

function BuildState({ view }: { view: PackageView }) {
  if (view.state === "building") {
    return (
      <Card title="Being built" note="Composed, then checked by decoding it again">
        <Progress
          label={`Package ${view.version}`}
          endpoint={`/api/v1/packages/${view.id}`}
          running={["building"]}
          initial={view.progress}
        />
      </Card>
    );
  }
  if (!view.failure) return null;
  const { code, message, serial, field } = view.failure;
  if (code === "package.cancelled")
    return (
      <Notice tone="caution" title="The build was cancelled">
        Nothing was stored, and the number {view.version} is not used again.{" "}
        <Link href={`/lots/${view.lot}/packages#build`}>Build another</Link>
      </Notice>
    );
  const named = serial !== undefined && message.includes(serial);
  return (
    <Notice tone="bad" title="The build did not finish">
      <p>
        {named ? null : <span className="font-mono">{[serial, field].filter(Boolean).join(" ")} </span>}
        {message} <span className="font-mono text-xs text-ink-soft">{code}</span>
      </p>
      <p>
        Nothing was stored. Mend it, then <Link href={`/lots/${view.lot}/packages#build`}>build again</Link>; the number{" "}
        {view.version} is not used twice.
      </p>
    </Notice>
  );
}

function Withdrawn({ withdrawal }: { withdrawal: Awaited<ReturnType<typeof findWithdrawal>> }) {
  if (!withdrawal) return null;
  return (
    <Notice tone="bad" title={`Withdrawn by ${withdrawal.by}`}>
      <TimeText at={withdrawal.at} />
      {withdrawal.reason ? `: “${withdrawal.reason}”` : ""}. No station may write it, and it is never live again.
    </Notice>
  );
}

/** The next step, where it is not the reader's own button. */
function WhatIsDue({ view, tab, engineer }: { view: PackageView; tab: PackageTab; engineer: boolean }) {
  const refusal = view.approvals.findLast((one) => one.decision === "refuse");
  if (view.state === "refused" && refusal) {
    return (
      <Notice tone="bad" title={`Refused by ${refusal.name}`}>
        “{refusal.reason}” A refused package stays as it is; mend it and build another.
      </Notice>
    );
  }
  const hindrance = view.state === "draft" && engineer ? hindranceOf(view) : undefined;
  if (hindrance) {
    return (
      <Notice tone="caution" title="Not ready for review">
        <p>
          {hindrance} {view.reviewers.length > 0 ? `Who may: ${view.reviewers.join(", ")}.` : "Nobody is left who may."}
        </p>
        {tab === "checks" ? null : (
          <p>
            <Link href={`/packages/${view.id}/checks`}>What the checks say</Link>
          </p>
        )}
      </Notice>
    );
  }
  return null;
}
