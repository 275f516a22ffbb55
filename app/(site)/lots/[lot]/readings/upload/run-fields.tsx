"use client";

import { Checkbox } from "@/app/_components/form/checkbox";
import { Select } from "@/app/_components/form/select";
import { TextArea } from "@/app/_components/form/text-area";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import { type ChosenEquipment, EquipmentChoice } from "../equipment-choice";
import { PURPOSES } from "../purposes";
import type { RunChoice, RunChoices } from "./use-run-choice";

export interface RunFieldsProps extends Pick<RunChoices, "runs" | "plans"> {
  choice: RunChoice;
  equipment: readonly ChosenEquipment[];
}

/** Fields of what an upload is. */
export function RunFields({ choice, runs, plans, equipment }: RunFieldsProps) {
  const replaceable = runs.filter((run) => run.purpose === choice.purpose);
  return (
    <>
      {plans.length > 0 ? (
        <Select
          label="Planned as"
          placeholder="No planned run"
          value={choice.plan}
          onChange={(event) => choice.choosePlan(event.currentTarget.value)}
          options={plans.map((one) => ({ value: one.id, name: `${one.name}, ${one.purpose} run` }))}
          help="What was planned and what was read are held against each other: missing readings, swapped positions, other loads."
        />
      ) : null}
      <div className="grid gap-4 md:grid-cols-2">
        <Select
          label="Purpose"
          options={PURPOSES}
          placeholder="What the run is for"
          required
          value={choice.purpose}
          onChange={(event) => choice.choosePurpose(event.currentTarget.value)}
        />
        <Select
          label="Replaces"
          placeholder="No earlier run"
          disabled={replaceable.length === 0}
          value={choice.supersedes}
          onChange={(event) => choice.chooseReplaced(event.currentTarget.value)}
          options={replaceable.map((run) => ({
            value: run.id,
            name: `${run.purpose} run of ${formatDateTime(run.createdAt)}, ${formatNumberOf(run.devices, "device")}`,
          }))}
          help="Coefficients that rest on the replaced run become stale."
        />
      </div>
      {choice.supersedes ? (
        <TextArea
          label="Why the earlier run is replaced"
          required
          maxLength={2000}
          value={choice.reason}
          onChange={(event) => choice.setReason(event.currentTarget.value)}
        />
      ) : null}
      <EquipmentChoice legend="Equipment used" equipment={equipment} used={choice.used} onUsed={choice.setUsed} />
      <Checkbox
        label="Add devices that the lot doesn't have yet"
        checked={choice.addDevices}
        onChange={(event) => choice.setAddDevices(event.currentTarget.checked)}
        help="Without it a serial that is not in the lot is an error, which catches mistyped serials."
      />
    </>
  );
}
