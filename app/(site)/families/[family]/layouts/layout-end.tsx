"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { ConfirmDialog } from "@/app/_components/confirm-dialog";
import { Digest } from "@/app/_components/digest";
import { TimeText } from "@/app/_components/time-text";
import { useToast } from "@/app/_components/toast";
import type { LayoutView } from "@/lib/services/layouts/get-layout";
import type { LayoutUse } from "@/lib/services/layouts/get-layout-use";
import { moveLayoutAction, retireLayoutAction } from "./layout-actions";
import { LayoutUses, RetireWarning } from "./layout-uses";

interface LayoutEndProps {
  family: string;
  layout: LayoutView;
  /** Lots with packages from this layout. */
  uses: readonly LayoutUse[];
  mayWrite: boolean;
}

/** Who wrote and who decided, where it is used, and the two ways out: dropping a draft, retiring what is published. */
export function LayoutEnd({ family, layout, uses, mayWrite }: LayoutEndProps) {
  const router = useRouter();
  const tell = useToast();
  const [open, setOpen] = useState(false);
  const address = { code: family, version: layout.version };
  const drop = layout.state === "draft";

  const confirm = async (reason: string | undefined) => {
    const result = drop ? await moveLayoutAction(address, "delete") : await retireLayoutAction(address, reason);
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: drop ? `Draft ${layout.version} dropped` : `Layout ${layout.version} retired` });
    if (drop) router.push(`/families/${family}`);
    else router.refresh();
    return null;
  };

  return (
    <Card title="Record">
      <ul className="text-sm">
        <li className="py-1">
          Begun by {layout.createdBy}, <TimeText at={layout.createdAt} />; written by {layout.makers.join(", ")}
        </li>
        {layout.submittedAt ? (
          <li className="py-1">
            Publishing asked for by {layout.submittedBy}, <TimeText at={layout.submittedAt} />
          </li>
        ) : null}
        {layout.decisions.map((decision) => (
          <li key={decision.at} className="py-1">
            {decision.decision === "approve" ? "Published" : "Refused"} by {decision.name},{" "}
            <TimeText at={decision.at} />
            {decision.reason ? <span className="block">“{decision.reason}”</span> : null}
          </li>
        ))}
        {layout.retiredAt ? (
          <li className="py-1">
            Retired, <TimeText at={layout.retiredAt} />
          </li>
        ) : null}
      </ul>
      {drop ? null : <LayoutUses uses={uses} />}
      <div className="mt-2 flex flex-wrap items-center justify-between gap-3">
        <Digest value={layout.sha256} name="layout digest" />
        {mayWrite && (drop || layout.state === "published") ? (
          <Button look="danger" onClick={() => setOpen(true)}>
            {drop ? "Drop draft" : `Retire layout ${layout.version}`}
          </Button>
        ) : null}
      </div>
      <ConfirmDialog
        open={open}
        onOpenChange={setOpen}
        danger
        title={drop ? `Drop draft ${layout.version}` : `Retire layout ${layout.version}`}
        description={drop ? "The draft is gone for good; its version is free again." : <RetireWarning uses={uses} />}
        confirm={drop ? "Drop it" : "Retire it"}
        reason={drop ? "none" : "optional"}
        onConfirm={({ reason }) => confirm(reason)}
      />
    </Card>
  );
}
