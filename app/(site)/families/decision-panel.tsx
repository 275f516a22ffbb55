"use client";

import { useRouter } from "next/navigation";
import { type ReactNode, useState } from "react";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { SigningPanel } from "@/app/_components/signing-panel";
import { useToast } from "@/app/_components/toast";
import type { ActionResult } from "@/lib/http/action";
import type { SignedDecision } from "./actions";

export interface DecisionPanelProps {
  /** What is decided, as "revision 2 of family MW-20". */
  subject: string;
  digest: string;
  /** What the reader has to see before signing; shown once opened. */
  changes: ReactNode;
  /** Names of who wrote it: they can't sign. */
  makers: readonly string[];
  oneTimeCode: boolean;
  onDecide: (decision: SignedDecision) => Promise<ActionResult>;
}

/** A second person's decision over a family revision or a layout: read what changes, then sign or refuse. */
export function DecisionPanel({ subject, digest, changes, makers, oneTimeCode, onDecide }: DecisionPanelProps) {
  const router = useRouter();
  const tell = useToast();
  const [reviewed, setReviewed] = useState(false);
  const [refusing, setRefusing] = useState(false);

  const decide = async (decision: "approve" | "refuse", values: Confirmation) => {
    const result = await onDecide({ ...values, decision });
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: decision === "approve" ? `Published ${subject}` : `Refused ${subject}` });
    router.refresh();
    return null;
  };

  return (
    <>
      <SigningPanel
        title={`Decide on ${subject}`}
        digest={digest}
        statement={`I checked ${subject} and publish it. From then on nobody can change it.`}
        changes={
          <details className="min-w-0" onToggle={(event) => event.currentTarget.open && setReviewed(true)}>
            <summary className="cursor-pointer font-semibold">What changes</summary>
            <div className="mt-2">{changes}</div>
          </details>
        }
        reviewed={reviewed}
        reviewHint="Open “What changes” first; then you can sign."
        confirm={`Publish ${subject}`}
        oneTimeCode={oneTimeCode}
        note={
          <div className="flex flex-col gap-2">
            <p>Written by {makers.join(", ")}, who can't sign it.</p>
            <Button look="danger" onClick={() => setRefusing(true)}>
              Refuse {subject}
            </Button>
          </div>
        }
        onSign={(values) => decide("approve", values)}
      />
      <ConfirmDialog
        open={refusing}
        onOpenChange={setRefusing}
        title={`Refuse ${subject}`}
        description="It becomes a draft again, with your reason beside it."
        confirm="Refuse it"
        danger
        reason="required"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={(values) => decide("refuse", values)}
      />
    </>
  );
}
