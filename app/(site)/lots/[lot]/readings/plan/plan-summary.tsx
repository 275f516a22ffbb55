"use client";

import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import { formatDuration } from "@/lib/domain/format/time";
import { soakMinutesOf } from "@/lib/domain/run-plan/run-plan";
import type { ShownPlanFinding } from "./findings-here";
import type { ReadDraft } from "./plan-draft";

export interface PlanSummaryProps {
  read: ReadDraft;
  rows: number | undefined;
  findings: readonly ShownPlanFinding[];
  /** Everything that has to be there is there. */
  ready: boolean;
  pending: boolean;
}

/** What the plan comes to, and the button that plans it. */
export function PlanSummary({ read, rows, findings, ready, pending }: PlanSummaryProps) {
  const blocking = findings.filter((finding) => finding.severity === "hard").length;
  const soft = findings.filter((finding) => finding.severity === "soft").length;
  return (
    <Card>
      <div className="flex flex-wrap items-end justify-between gap-4">
        <Facts
          facts={[
            { value: formatCount(read.devices.length), label: "devices" },
            { value: formatCount(read.points.length), label: "points" },
            { value: formatCount(rows), label: "readings" },
            {
              value: formatDuration(soakMinutesOf(read.points) * 60),
              label: "of soak at least, ways between not counted",
            },
          ]}
        />
        <div className="flex flex-wrap items-center gap-x-4 gap-y-2">
          <p role="status" className="text-sm">
            {blocking > 0 ? (
              <span className="font-medium text-oxide">{formatNumberOf(blocking, "finding")} to mend first.</span>
            ) : soft > 0 ? (
              <span className="font-medium text-ochre">
                {formatNumberOf(soft, "finding")} to look at; it can be planned as it is.
              </span>
            ) : null}
          </p>
          <Button
            type="submit"
            look="primary"
            disabled={!ready || blocking > 0}
            pending={pending}
            pendingText="Planning"
          >
            Plan the run
          </Button>
        </div>
      </div>
    </Card>
  );
}
