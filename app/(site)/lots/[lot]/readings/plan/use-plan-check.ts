"use client";

import { useQuery } from "@tanstack/react-query";
import { useEffect, useState } from "react";
import { callApi } from "@/app/_components/api-client";
import type { RunPlanCheck } from "@/schemas/api/run-plans";
import type { PlanDraft, ReadDraft } from "./plan-draft";

/** Stands still so long before a change is looked at, ms. */
const PAUSE_MS = 350;

/** What the server says of the plan as it stands; the last answer stays until the next one is there. */
export function usePlanCheck(lot: string, draft: PlanDraft, read: ReadDraft): RunPlanCheck | undefined {
  const { purpose, equipment } = draft;
  const text = JSON.stringify({ purpose, equipment, devices: read.devices, points: read.points });
  const [settled, setSettled] = useState(text);
  useEffect(() => {
    const timer = setTimeout(() => setSettled(text), PAUSE_MS);
    return () => clearTimeout(timer);
  }, [text]);
  const { data } = useQuery({
    queryKey: ["plan-check", lot, settled],
    queryFn: ({ signal }) =>
      callApi<RunPlanCheck>(`/api/v1/lots/${encodeURIComponent(lot)}/run-plans/check`, {
        method: "POST",
        json: JSON.parse(settled),
        signal,
      }),
    placeholderData: (previous) => previous,
    retry: false,
  });
  return data;
}
