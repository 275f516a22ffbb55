"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { FindingsList } from "@/app/_components/findings-list";
import { TextArea } from "@/app/_components/form/text-area";
import { Notice } from "@/app/_components/notice";
import { SigningPanel } from "@/app/_components/signing-panel";
import { useToast } from "@/app/_components/toast";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { DerivationView } from "@/schemas/api/derivations";
import { decideDerivationAction } from "./actions";

export interface DecisionPanelProps {
  view: DerivationView;
  isReviewer: boolean;
  oneTimeCode: boolean;
}

type Findings = DerivationView["findings"];

/** Serials as pasted, one a line or separated by blanks and commas; undefined where none is given. */
function serialsOf(text: string): string[] | undefined {
  const serials = text.split(/[\s,;]+/).filter(Boolean);
  return serials.length > 0 ? serials : undefined;
}

/** Soft findings that nobody has accepted yet, gathered by code. */
function openByCode(
  { findings, acknowledgements }: DerivationView,
  serials: readonly string[] | undefined,
): Map<string, Findings> {
  const known = new Set(acknowledgements.map((one) => one.finding));
  const named = serials && new Set(serials.map((serial) => serial.toUpperCase()));
  const groups = new Map<string, Findings>();
  for (const finding of findings) {
    if (finding.severity !== "soft" || known.has(finding.id)) continue;
    if (named && finding.serial !== null && !named.has(finding.serial)) continue;
    groups.set(finding.code, [...(groups.get(finding.code) ?? []), finding]);
  }
  return groups;
}

/** A second person's decision over a derivation: read findings, accept the soft ones with a reason, then sign or refuse. */
export function DecisionPanel({ view, isReviewer, oneTimeCode }: DecisionPanelProps) {
  const router = useRouter();
  const tell = useToast();
  const [reviewed, setReviewed] = useState(false);
  const [only, setOnly] = useState("");
  const [asking, setAsking] = useState<"refuse" | "revoke">();
  const proposed = view.counts.states.proposed ?? 0;
  const approved = view.counts.states.approved ?? 0;
  const serials = serialsOf(only);
  const groups = openByCode(view, serials);

  const decide = async (decision: "approve" | "refuse" | "revoke", values: Confirmation, form: FormData) => {
    const acknowledge = [...groups.keys()].flatMap((code) => {
      const reason = form.get(`accept ${code}`);
      return typeof reason === "string" && reason.trim() !== "" ? [{ finding: code, reason }] : [];
    });
    const named = decision === "approve" ? serials : serialsOf(String(form.get("only") ?? ""));
    const input = { ...values, decision, serials: named, ...(decision === "approve" && { acknowledge }) };
    const result = await decideDerivationAction(view.id, input);
    if (!result.ok) return result.problem;
    const done = { approve: "Approved", refuse: "Refused", revoke: "Revoked" } as const;
    tell({ tone: "good", title: `${done[decision]} coefficients of ${view.lot}` });
    router.refresh();
    return null;
  };

  if (proposed === 0 && approved === 0) return null;
  if (!view.mayDecide) {
    return (
      <Card title="Decision">
        <p className="text-sm text-ink-soft">
          {isReviewer
            ? "You had a hand in this derivation; a reviewer who had none decides on it."
            : `Waits for a reviewer who had no hand in it. Makers are ${[...new Set(view.makers.map((one) => one.name))].join(", ")}.`}
        </p>
      </Card>
    );
  }
  const count = serials?.length ?? proposed;
  const hard = view.findings.filter((finding) => finding.severity === "hard");
  return (
    <>
      {proposed > 0 ? (
        <SigningPanel
          title="Decide on these coefficients"
          digest={view.sha256}
          statement={`I have looked at readings, residuals and findings and approve the coefficients of ${formatNumberOf(count, "device")}.`}
          reviewed={reviewed}
          reviewHint="Open “Findings” first; then you can sign."
          confirm={`Approve ${formatNumberOf(count, "device")}`}
          oneTimeCode={oneTimeCode}
          changes={
            <>
              <details className="min-w-0" onToggle={(event) => event.currentTarget.open && setReviewed(true)}>
                <summary className="cursor-pointer font-semibold">Findings ({view.findings.length})</summary>
                <FindingsList findings={view.findings.slice(0, 200)} empty="No findings." />
              </details>
              {hard.length > 0 ? (
                <Notice tone="bad" title={`${formatNumberOf(hard.length, "finding")} against approval`}>
                  {hard.some((finding) => finding.serial === null)
                    ? "One of them is about the whole lot: this derivation can't be approved."
                    : "They are about single devices: approve the others by naming them."}
                </Notice>
              ) : null}
            </>
          }
          onSign={(values, form) => decide("approve", values, form)}
          note={
            <Button look="danger" onClick={() => setAsking("refuse")}>
              Refuse coefficients
            </Button>
          }
        >
          <TextArea
            label="Only these serials"
            code
            value={only}
            onChange={(event) => setOnly(event.currentTarget.value)}
            help={`Empty for all ${proposed} that are proposed.`}
          />
          {[...groups].map(([code, findings]) => (
            <TextArea
              key={code}
              label={`Why this is acceptable (${formatNumberOf(findings.length, "finding")})`}
              name={`accept ${code}`}
              required
              maxLength={2000}
              rows={2}
              help={
                <>
                  {findings[0]?.serial ? <span className="font-mono">{findings[0].serial}: </span> : null}
                  {findings[0]?.message}
                  {findings.length > 1 ? ` And ${findings.length - 1} more of this kind.` : ""}
                </>
              }
            />
          ))}
        </SigningPanel>
      ) : null}
      {approved > 0 ? (
        <Card title="Take approval back" look="bad">
          <p className="mb-3 text-sm">
            {formatNumberOf(approved, "set")} approved here. A revoked set is never packed again; what devices carry
            already does not change by it.
          </p>
          <Button look="danger" onClick={() => setAsking("revoke")}>
            Revoke coefficients
          </Button>
        </Card>
      ) : null}
      <ConfirmDialog
        open={asking !== undefined}
        onOpenChange={(open) => !open && setAsking(undefined)}
        title={asking === "revoke" ? "Revoke approved coefficients" : "Refuse proposed coefficients"}
        description="It can't be undone: coefficients are then derived anew."
        confirm={asking === "revoke" ? "Revoke them" : "Refuse them"}
        danger
        reason="required"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={(values, form) => decide(asking ?? "refuse", values, form)}
      >
        <TextArea label="Only these serials" name="only" code help="Empty for all of them." />
      </ConfirmDialog>
    </>
  );
}
