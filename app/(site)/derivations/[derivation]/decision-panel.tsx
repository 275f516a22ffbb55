"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { FindingsList } from "@/app/_components/findings-list";
import { Notice } from "@/app/_components/notice";
import { SigningPanel } from "@/app/_components/signing-panel";
import { useToast } from "@/app/_components/toast";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import type { SetPackage } from "@/schemas/api/derivation-tables";
import type { DerivationView } from "@/schemas/api/derivations";
import { AcknowledgeFields } from "./acknowledge-fields";
import { decideDerivationAction } from "./actions";
import { acknowledgementsOf, findingsInReach } from "./open-findings";
import { Consequences, RevokeCard } from "./revoke-card";
import { useSelection } from "./selection";

export interface DecisionPanelProps {
  view: DerivationView;
  isReviewer: boolean;
  oneTimeCode: boolean;
  /** Names of the reviewers who may decide. */
  deciders: readonly string[];
  /** That carry its coefficients. */
  packages: readonly SetPackage[];
}

type Decision = "approve" | "refuse" | "revoke";

const DONE = { approve: "Approved", refuse: "Refused", revoke: "Revoked" } as const;

/** A second person's decision: read findings, accept the soft ones with a reason, then sign or refuse; later revoke. */
export function DecisionPanel(props: DecisionPanelProps) {
  const { view, oneTimeCode, deciders, packages } = props;
  const router = useRouter();
  const tell = useToast();
  const { serials, setSerials } = useSelection();
  const [reviewed, setReviewed] = useState(false);
  const [asking, setAsking] = useState<"refuse" | "revoke">();
  const { proposed = 0, approved = 0 } = view.counts.states;
  const chosen = serials.size > 0 ? serials : undefined;
  const { hard, open } = findingsInReach(view, chosen);

  const decide = async (decision: Decision, values: Confirmation, form: FormData) => {
    const acknowledge = decision === "approve" ? acknowledgementsOf(form, open) : undefined;
    const result = await decideDerivationAction(view.id, {
      ...values,
      decision,
      serials: chosen && [...chosen],
      acknowledge,
    });
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: `${DONE[decision]} coefficients of ${view.lot}` });
    setSerials(new Set());
    router.refresh();
    return null;
  };

  if (proposed === 0 && approved === 0) return null;
  if (!view.mayDecide) return <WhoDecides {...props} />;
  const count = chosen?.size ?? proposed;
  const devices = formatNumberOf(count, chosen ? "selected device" : "device");
  return (
    <div id="decision" className="flex scroll-mt-4 flex-col gap-[18px] print:hidden">
      {proposed > 0 ? (
        <SigningPanel
          title="Decide on these coefficients"
          digest={view.sha256}
          statement={`I have looked at readings, residuals and findings and approve the coefficients of ${devices}.`}
          reviewed={reviewed && hard.length === 0}
          reviewHint={
            hard.length > 0
              ? "A finding blocks approval; refusing is possible all the same."
              : "Open “Findings” first; then you can sign."
          }
          confirm={`Approve ${devices}`}
          oneTimeCode={oneTimeCode}
          changes={
            <>
              <Reach chosen={chosen?.size} proposed={proposed} />
              <details className="min-w-0" onToggle={(event) => event.currentTarget.open && setReviewed(true)}>
                <summary className="cursor-pointer font-semibold">Findings ({foundText(view)})</summary>
                <FindingsList findings={view.findings} empty="No findings." devicePath={`/derivations/${view.id}`} />
              </details>
              {hard.length > 0 ? (
                <Notice tone="bad" title={`${formatNumberOf(hard.length, "finding")} against approval`}>
                  {hard.some((finding) => finding.serial === null)
                    ? "One of them is about the whole lot: this derivation can't be approved."
                    : "They are about single devices: select the others in the table and approve those."}
                </Notice>
              ) : null}
              <p className="text-sm text-ink-soft">May sign: {deciders.join(", ")}. One of them is enough.</p>
            </>
          }
          onSign={(values, form) => decide("approve", values, form)}
          note={
            <Button look="danger" onClick={() => setAsking("refuse")}>
              Refuse coefficients of {devices}
            </Button>
          }
        >
          <AcknowledgeFields open={open} />
        </SigningPanel>
      ) : null}
      {approved > 0 ? (
        <RevokeCard
          approved={approved}
          selected={chosen?.size ?? 0}
          packages={packages}
          onRevoke={() => setAsking("revoke")}
        />
      ) : null}
      <ConfirmDialog
        open={asking !== undefined}
        onOpenChange={(next) => !next && setAsking(undefined)}
        title={asking === "revoke" ? "Revoke approved coefficients" : "Refuse proposed coefficients"}
        description={`Of ${chosen ? formatNumberOf(chosen.size, "selected device") : "all devices"}. It can't be undone: coefficients are then derived anew. Who made them gets the reason by mail.`}
        confirm={asking === "revoke" ? "Revoke them" : "Refuse them"}
        danger
        reason="required"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={(values, form) => decide(asking ?? "refuse", values, form)}
      >
        {asking === "revoke" ? <Consequences packages={packages} /> : null}
      </ConfirmDialog>
    </div>
  );
}

function foundText({ findings, counts }: DerivationView): string {
  const { hard, soft, note } = counts.findings;
  const all = hard + soft + note;
  return all > findings.length ? `the first ${formatCount(findings.length)} of ${formatCount(all)}` : formatCount(all);
}

function Reach({ chosen, proposed }: { chosen: number | undefined; proposed: number }) {
  return (
    <p className="text-sm" role="status">
      {chosen === undefined
        ? `All ${formatNumberOf(proposed, "proposed device")}. To decide over some, select their rows in the table above: mouse, or arrow keys and Space.`
        : `${formatNumberOf(chosen, "selected device")} of ${formatCount(proposed)} proposed.`}
    </p>
  );
}

/** For everybody who can't decide here: who can. */
function WhoDecides({ view, isReviewer, deciders }: DecisionPanelProps) {
  if ((view.counts.states.proposed ?? 0) === 0) return null;
  const makers = [...new Set(view.makers.map((one) => one.name))].join(", ");
  return (
    <div id="decision" className="print:hidden">
      <Card title="Decision">
        <p className="text-sm text-ink-soft">
          {isReviewer ? "You had a hand in this derivation. " : ""}
          {deciders.length > 0
            ? `It waits for a reviewer who had no hand in it: ${deciders.join(", ")}. One of them is enough; they were told by mail.`
            : `Nobody may decide over it: every reviewer had a hand in it. Ask an admin for a further reviewer.`}{" "}
          Its makers are {makers}.
        </p>
      </Card>
    </div>
  );
}
