"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { Digest } from "@/app/_components/digest";
import { SigningPanel } from "@/app/_components/signing-panel";
import { useToast } from "@/app/_components/toast";
import { decidePackageAction } from "../../actions";
import { useSeen } from "../seen";
import type { MakerActs } from "./page";

export interface DecisionPanelProps {
  id: string;
  version: string;
  digest: string;
  reviewDigest: string;
  /** What the signature says. */
  statement: string;
  /** Who signs. */
  name: string;
  makers: readonly MakerActs[];
  /** Warnings that were waived. */
  waived: number;
  oneTimeCode: boolean;
}

/** A second person's signature over a package, given only after its differences were opened; or its refusal. */
export function DecisionPanel(props: DecisionPanelProps) {
  const { id, version, digest, reviewDigest, name, makers, waived, oneTimeCode } = props;
  const router = useRouter();
  const tell = useToast();
  const seen = useSeen(reviewDigest);
  const [refusing, setRefusing] = useState(false);

  const decide = async (decision: "approve" | "refuse", values: Confirmation) => {
    const result = await decidePackageAction(id, { ...values, decision, reviewDigest });
    if (!result.ok) return result.problem;
    tell({
      tone: "good",
      title: decision === "approve" ? `Release ${version} approved` : `Package ${version} refused`,
      text: decision === "approve" ? "It is not live yet: it is released in a step of its own." : undefined,
    });
    router.refresh();
    return null;
  };

  return (
    <>
      <SigningPanel
        title="Sign"
        digest={digest}
        statement={props.statement}
        changes={
          waived > 0 ? (
            <p className="text-sm text-ochre">
              {waived === 1 ? "One warning was waived" : `${waived} warnings were waived`}: the reasons stand with the
              checks.
            </p>
          ) : undefined
        }
        reviewed={seen}
        reviewHint="Open the differences first; then you can sign."
        confirm={`Approve release ${version}`}
        oneTimeCode={oneTimeCode}
        note={
          <div className="flex flex-col gap-2">
            <p>
              Signed as {name}, over the digest above with its checks, its waivers and what is live:
              <span className="block">
                <Digest value={reviewDigest} name="review digest" />
              </span>
            </p>
            <p>
              Made by {makers.map((maker) => `${maker.name} (${maker.acts.join(", ")})`).join(", ")}: they can't sign.
            </p>
            <Button look="danger" onClick={() => setRefusing(true)}>
              Refuse with a reason
            </Button>
          </div>
        }
        onSign={(values) => decide("approve", values)}
      />
      <ConfirmDialog
        open={refusing}
        onOpenChange={setRefusing}
        title={`Refuse package ${version}`}
        description="It stays as it is for ever, with your reason beside it; another package is built instead."
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
