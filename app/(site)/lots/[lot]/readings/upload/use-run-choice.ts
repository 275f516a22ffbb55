"use client";

import { useState } from "react";
import type { Purpose } from "@/lib/domain/compensation/types";

export interface ReplaceableRun {
  id: string;
  purpose: string;
  createdAt: string;
  devices: number;
  planId: string | null;
}

export interface OpenPlan {
  id: string;
  name: string;
  purpose: string;
  equipment: readonly string[];
}

export interface RunChoices {
  /** Runs that count and so may be replaced. */
  runs: readonly ReplaceableRun[];
  /** Planned runs that wait for their readings. */
  plans: readonly OpenPlan[];
  /** What a link chose: the planned run, or the run to replace. */
  start?: { plan?: string; supersedes?: string };
}

/** What an upload is: its purpose, plan, equipment, and the run that it replaces. */
export function useRunChoice({ runs, plans, start = {} }: RunChoices) {
  const startPlan = plans.find((one) => one.id === start.plan);
  const startRun = runs.find((one) => one.id === start.supersedes);
  const [purpose, setPurpose] = useState((startPlan?.purpose ?? startRun?.purpose ?? "") as Purpose | "");
  const [plan, setPlan] = useState(startPlan?.id ?? "");
  const [used, setUsed] = useState<readonly string[]>(startPlan?.equipment ?? []);
  const [addDevices, setAddDevices] = useState(false);
  const [supersedes, setSupersedes] = useState(startRun?.id ?? "");
  const [reason, setReason] = useState("");

  const choosePurpose = (next: string) => {
    setPurpose(next as Purpose | "");
    setSupersedes("");
    setPlan("");
  };
  const choosePlan = (id: string) => {
    const chosen = plans.find((one) => one.id === id);
    setPlan(id);
    if (!chosen) return;
    setPurpose(chosen.purpose as Purpose);
    setUsed(chosen.equipment);
    setSupersedes("");
  };
  const chooseReplaced = (id: string) => {
    setSupersedes(id);
    setPlan("");
  };
  const query = (): URLSearchParams => {
    const asked = new URLSearchParams({ purpose, addDevices: String(addDevices) });
    if (used.length > 0) asked.set("equipment", used.join(","));
    if (supersedes) {
      asked.set("supersedes", supersedes);
      asked.set("reason", reason);
    }
    // A corrected file stays the reading of what was planned.
    const planned = runs.find((run) => run.id === supersedes)?.planId ?? plan;
    if (planned) asked.set("plan", planned);
    return asked;
  };
  const values = { purpose, plan, used, addDevices, supersedes, reason };
  return { ...values, choosePurpose, choosePlan, chooseReplaced, setUsed, setAddDevices, setReason, query };
}

export type RunChoice = ReturnType<typeof useRunChoice>;
