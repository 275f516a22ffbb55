"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Card } from "@/app/_components/card";
import { FormError } from "@/app/_components/form/form-error";
import { Select } from "@/app/_components/form/select";
import { TextArea } from "@/app/_components/form/text-area";
import { TextInput } from "@/app/_components/form/text-input";
import { Notice } from "@/app/_components/notice";
import type { FamilyRules, Purpose } from "@/lib/domain/compensation/types";
import type { RunPlanView } from "@/schemas/api/run-plans";
import type { SamplePlanView } from "@/schemas/api/sample-plan";
import { type ChosenEquipment, EquipmentChoice } from "../equipment-choice";
import { PURPOSES } from "../purposes";
import { DevicesPart } from "./devices-part";
import { FindingsHere } from "./findings-here";
import { type PlanDraft, proposedPoints, readDraft, startDraft } from "./plan-draft";
import { PlanSummary } from "./plan-summary";
import { PointsPart } from "./points-part";
import { SampleSize } from "./sample-size";
import { usePlanCheck } from "./use-plan-check";

export interface PlanFormProps {
  lot: string;
  family: FamilyRules;
  equipment: readonly ChosenEquipment[];
  sizing: Pick<SamplePlanView, "limit" | "coverage" | "confidence" | "earlier">;
}

/** A run to be planned: what for, which devices on which places, temperatures, loads, equipment. Findings stand in place. */
export function PlanForm({ lot, family, equipment, sizing }: PlanFormProps) {
  const router = useRouter();
  const [draft, setDraft] = useState<PlanDraft>(() => startDraft(family));
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails>();
  const read = readDraft(draft);
  const check = usePlanCheck(lot, draft, read);
  const findings = check?.findings ?? [];
  const change = (part: Partial<PlanDraft>) => setDraft((now) => ({ ...now, ...part }));

  const choosePurpose = (purpose: Purpose) => {
    // Points that nobody touched follow the purpose.
    const untouched = JSON.stringify(draft.points) === JSON.stringify(proposedPoints(family, draft.purpose));
    change({ purpose, ...(untouched && { points: proposedPoints(family, purpose) }) });
  };
  const send = async () => {
    setPending(true);
    setProblem(undefined);
    const { name, purpose, notes } = draft;
    const json = {
      name,
      purpose,
      devices: read.devices,
      points: read.points,
      equipment: draft.equipment,
      ...(notes.trim() !== "" && { notes }),
      ...(read.isDrawn && { sampleDraw: draft.draw?.id }),
    };
    try {
      const path = `/api/v1/lots/${encodeURIComponent(lot)}/run-plans`;
      const plan = await callApi<RunPlanView>(path, { method: "POST", json });
      router.push(`/lots/${encodeURIComponent(lot)}/readings/plans/${plan.id}`);
    } catch (error) {
      setProblem(problemOf(error));
      setPending(false);
    }
  };

  const sized = draft.purpose === "sample" || draft.purpose === "verification";
  const ready = draft.name.trim() !== "" && read.devices.length > 0 && read.refused.length === 0 && read.pointsComplete;
  return (
    <form
      className="flex flex-col gap-[18px]"
      onSubmit={(event) => {
        event.preventDefault();
        void send();
      }}
    >
      <Card title="What it is">
        <div className="grid gap-4 md:grid-cols-2">
          <TextInput
            label="Name"
            required
            maxLength={80}
            value={draft.name}
            onChange={(event) => change({ name: event.currentTarget.value })}
            help="Once in this lot; it stands on the run sheet."
          />
          <Select
            label="Purpose"
            options={PURPOSES}
            value={draft.purpose}
            onChange={(event) => choosePurpose(event.currentTarget.value as Purpose)}
          />
        </div>
      </Card>
      {sized ? <SampleSize purpose={draft.purpose} sizing={sizing} /> : null}
      <DevicesPart lot={lot} draft={draft} read={read} change={change} findings={findings} />
      <PointsPart draft={draft} change={change} findings={findings} />
      <Card title="Equipment">
        <EquipmentChoice
          legend="To be used"
          equipment={equipment}
          used={draft.equipment}
          onUsed={(codes) => change({ equipment: codes })}
        />
        <div className="mt-3">
          <FindingsHere findings={findings.filter((finding) => finding.part === "equipment")} />
        </div>
      </Card>
      <Card title="For who runs it">
        <TextArea
          label="Notes on the run sheet"
          maxLength={4000}
          value={draft.notes}
          onChange={(event) => change({ notes: event.currentTarget.value })}
          help="What is not in the temperatures and loads: fixtures, cables, who to call."
        />
      </Card>
      <Notice tone="caution" title="At the chamber">
        Surfaces are hot or cold, loads hang or stand high, and a cold device draws moisture: let it warm up before it
        is switched on. The run sheet says so too. The procedures of your site and the maker of the chamber come first.
      </Notice>
      <FormError problem={problem} />
      <PlanSummary read={read} rows={check?.rows} findings={findings} ready={ready} pending={pending} />
    </form>
  );
}
