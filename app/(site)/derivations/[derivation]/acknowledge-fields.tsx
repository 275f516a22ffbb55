"use client";

import { useState } from "react";
import { Button } from "@/app/_components/button";
import { TextArea } from "@/app/_components/form/text-area";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { FindingsInReach, ShownFindings } from "./open-findings";

/** More reasons of one kind than this nobody types one by one. */
const ONE_BY_ONE_MAX = 40;

/** Soft findings to be accepted with a reason, kind by kind: one reason for all of a kind, or one for each. */
export function AcknowledgeFields({ open }: { open: FindingsInReach["open"] }) {
  if (open.size === 0) return null;
  return (
    <fieldset className="m-0 flex min-w-0 flex-col gap-3">
      <legend className="mb-1 text-sm font-semibold">Accept with a reason</legend>
      {[...open].map(([code, findings]) => (
        <Kind key={code} code={code} findings={findings} />
      ))}
    </fieldset>
  );
}

function Kind({ code, findings }: { code: string; findings: ShownFindings }) {
  const [single, setSingle] = useState(false);
  const [first] = findings;
  const reason = { required: true, maxLength: 2000, rows: 2 } as const;
  const shown = (finding: ShownFindings[number] | undefined) => (
    <>
      {finding?.serial ? <span className="font-mono">{finding.serial}: </span> : null}
      {finding?.message}
    </>
  );
  return (
    <div className="flex flex-col gap-2 border-l-2 border-ochre pl-3">
      {single ? (
        findings.map((finding) => (
          <TextArea
            key={finding.id}
            label={`Why this is acceptable${finding.serial ? `, ${finding.serial}` : ""}`}
            name={`accept ${finding.id}`}
            help={shown(finding)}
            {...reason}
          />
        ))
      ) : (
        <TextArea
          label={`Why this is acceptable (${formatNumberOf(findings.length, "finding")}, ${code})`}
          name={`accept ${code}`}
          help={
            <>
              {shown(first)}
              {findings.length > 1 ? ` And ${findings.length - 1} more of this kind, under the same reason.` : ""}
            </>
          }
          {...reason}
        />
      )}
      {findings.length > 1 && findings.length <= ONE_BY_ONE_MAX ? (
        <div>
          <Button onClick={() => setSingle(!single)}>
            {single ? "One reason for all of them" : "A reason for each"}
          </Button>
        </div>
      ) : null}
    </div>
  );
}
