"use client";

import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FormError } from "@/app/_components/form/form-error";
import { NumberInput } from "@/app/_components/form/number-input";
import { TextArea } from "@/app/_components/form/text-area";
import { TextInput } from "@/app/_components/form/text-input";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { SampleDrawView } from "@/schemas/api/sample-draws";
import { DrawnNote } from "../drawn-note";
import { FindingsHere, type ShownPlanFinding } from "./findings-here";
import { PlacesTable } from "./places-table";
import type { PlanDraft, ReadDraft } from "./plan-draft";

export interface PlanPartProps {
  draft: PlanDraft;
  change: (part: Partial<PlanDraft>) => void;
  findings: readonly ShownPlanFinding[];
}

/** Which devices stand where: drawn at random or typed, places by a rule or by hand. */
export function DevicesPart({ lot, draft, read, change, findings }: PlanPartProps & { lot: string; read: ReadDraft }) {
  const { rule } = draft;
  const [first] = read.refused;
  const put = (part: Partial<PlanDraft["rule"]>) => change({ rule: { ...rule, ...part } });
  const about = findings.filter((finding) => finding.part === "devices");
  return (
    <Card title="Devices and their places" note="In working order">
      <div className="grid gap-x-8 gap-y-4 lg:grid-cols-2">
        <div className="flex flex-col gap-4">
          <DrawButton lot={lot} onDrawn={(draw) => change({ draw, serials: draw.serials.join("\n") })} />
          <TextArea
            label="Serials"
            code
            rows={6}
            value={draft.serials}
            onChange={(event) => change({ serials: event.currentTarget.value })}
            help="One a line, in the order in which they are placed."
            error={first ? `“${first.text}” in line ${first.line} can't be a serial: mend or remove it.` : undefined}
          />
        </div>
        <div className="flex flex-col gap-4">
          <div className="grid grid-cols-3 gap-3">
            <TextInput
              label="Place prefix"
              code
              maxLength={20}
              value={rule.prefix}
              onChange={(event) => put({ prefix: event.currentTarget.value })}
            />
            <NumberInput
              label="First number"
              value={rule.from}
              onChange={(event) => put({ from: event.currentTarget.value })}
            />
            <NumberInput
              label="Digits"
              value={rule.digits}
              onChange={(event) => put({ digits: event.currentTarget.value })}
            />
          </div>
          {draft.draw ? <DrawnNote draw={draft.draw} changed={!read.isDrawn} /> : null}
          {read.repeated > 0 ? (
            <p className="text-sm text-ochre">
              {formatNumberOf(read.repeated, "serial")} stood there twice and counts once.
            </p>
          ) : null}
          <FindingsHere findings={about.filter((finding) => finding.serial === null)} />
        </div>
      </div>
      <PlacesTable
        devices={read.devices}
        findings={about}
        onPlace={(serial, place) => change({ places: { ...draft.places, [serial]: place } })}
      />
    </Card>
  );
}

function DrawButton({ lot, onDrawn }: { lot: string; onDrawn: (draw: SampleDrawView) => void }) {
  const [count, setCount] = useState("10");
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails>();
  const isCount = /^[1-9]\d{0,4}$/.test(count.trim());
  const draw = async () => {
    setPending(true);
    setProblem(undefined);
    try {
      const path = `/api/v1/lots/${encodeURIComponent(lot)}/sample-draws`;
      onDrawn(await callApi<SampleDrawView>(path, { method: "POST", json: { count: Number(count) } }));
    } catch (error) {
      setProblem(problemOf(error));
    }
    setPending(false);
  };
  return (
    <div className="flex flex-col gap-2">
      <div className="flex items-end gap-2.5">
        <div className="w-28">
          <NumberInput label="How many" value={count} onChange={(event) => setCount(event.currentTarget.value)} />
        </div>
        <Button look="outline" disabled={!isCount} pending={pending} pendingText="Drawing" onClick={() => void draw()}>
          Draw at random
        </Button>
      </div>
      <p className="text-xs text-ink-soft">
        Balanced over gauge and material batches where devices carry them; the seed is recorded, so that the draw can be
        repeated. Each draw stands in the ledger.
      </p>
      <FormError problem={problem} />
    </div>
  );
}
