"use client";

import Link from "next/link";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TimeText } from "@/app/_components/time-text";
import { useToast } from "@/app/_components/toast";
import type { PackageSummary, ReinstatementView } from "@/schemas/api/packages";
import { decideReinstatementAction } from "../../../packages/actions";

export interface OpenReinstatementProps {
  request: ReinstatementView;
  live: PackageSummary | null;
  oneTimeCode: boolean;
}

/** A request to go back, and its decision by a second person. */
export function OpenReinstatement({ request, live, oneTimeCode }: OpenReinstatementProps) {
  const router = useRouter();
  const tell = useToast();
  const [asking, setAsking] = useState<"approve" | "refuse">();
  const subject = `release ${request.version}`;

  const decide = async (values: Confirmation) => {
    if (!asking) return null;
    const result = await decideReinstatementAction(request.id, { ...values, decision: asking });
    if (!result.ok) return result.problem;
    tell({
      tone: "good",
      title:
        asking === "approve"
          ? `Release ${request.version} is live again`
          : `Reinstatement of ${request.version} refused`,
    });
    router.refresh();
    return null;
  };

  return (
    <Card
      title={`Make ${subject} live again`}
      look="caution"
      aside={<StateMark {...stateOf("reinstatement", request.state)} />}
    >
      <p>
        {request.askedBy} asked, <TimeText at={request.askedAt} />: “{request.reason}”
      </p>
      <p className="mt-1 text-sm text-ink-soft">
        {live ? `Release ${live.version} is live now and would be superseded. ` : "Nothing is live now. "}
        {live ? (
          <Link href={`/compare?from=${live.id}&to=${request.package}`}>
            What changes between {live.version} and {request.version}
          </Link>
        ) : (
          <Link href={`/packages/${request.package}`}>Package {request.version}</Link>
        )}
      </p>
      {request.mayDecide ? (
        <div className="mt-3 flex flex-wrap gap-2.5">
          <Button look="danger" onClick={() => setAsking("refuse")}>
            Refuse
          </Button>
          <Button look="primary" onClick={() => setAsking("approve")}>
            Make {request.version} live again
          </Button>
        </div>
      ) : (
        <p className="mt-2 text-sm text-ink-soft">A reviewer other than {request.askedBy} decides.</p>
      )}
      <ConfirmDialog
        open={asking !== undefined}
        onOpenChange={(open) => !open && setAsking(undefined)}
        title={asking === "refuse" ? `Refuse to make ${subject} live again` : `Make ${subject} live again`}
        description={
          asking === "refuse"
            ? "What is live stays as it is."
            : `You sign: I agree that package ${request.version} of lot ${request.lot} goes live again. Stations write it from this moment; devices that carry other values stand on the re-write list.`
        }
        confirm={asking === "refuse" ? "Refuse it" : `Make ${request.version} live again`}
        danger={asking === "refuse"}
        reason={asking === "refuse" ? "required" : "none"}
        password
        oneTimeCode={oneTimeCode}
        onConfirm={decide}
      />
    </Card>
  );
}

/** Requests that were decided, newest first. */
export function PastReinstatements({ requests }: { requests: readonly ReinstatementView[] }) {
  if (requests.length === 0) return null;
  return (
    <Card title="Reinstatements so far">
      <ul className="flex flex-col text-sm">
        {requests.map((request) => (
          <li key={request.id} className="border-b border-rule/55 py-2 last:border-0">
            <p className="flex flex-wrap items-baseline gap-x-3">
              <StateMark {...stateOf("reinstatement", request.state)} />
              <Link href={`/packages/${request.package}`}>Release {request.version}</Link>
              <span>
                asked for by {request.askedBy}, <TimeText at={request.askedAt} />: “{request.reason}”
              </span>
            </p>
            {request.approvals.map((one) => (
              <p key={one.at} className="mt-0.5 text-ink-soft">
                {one.name}, <TimeText at={one.at} />: “{one.meaning}”{one.reason ? ` ${one.reason}` : ""}
              </p>
            ))}
          </li>
        ))}
      </ul>
    </Card>
  );
}
