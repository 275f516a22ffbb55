"use client";

import { useEffect, useState } from "react";
import type { LayoutView } from "@/lib/services/layouts/get-layout";
import type { DraftState } from "./use-draft";

/** How a draft's text stands: saved 12 s ago, on its way, or only in this browser. */
export function DraftStatus({ state, layout }: { state: DraftState; layout: LayoutView | undefined }) {
  const now = useSeconds(state.savedAt !== undefined);
  const { status, savedAt, unfinished } = state;
  const tail = unfinished ? ", with errors still" : "";
  if (state.news?.kind === "text" && status !== "offline") return `${state.news.by} saved another text`;
  switch (status) {
    case "typing":
      return "not saved yet";
    case "saving":
      return "saving";
    case "offline":
      return "no connection: kept in this browser, tried again every 5 s";
    case "kept":
      return "kept in this browser until it is added as a draft";
    case "refused":
      return state.conflict ? `${state.conflict.by} saved another text` : "not saved";
    default:
      if (savedAt !== undefined) return `saved ${agoText(now - savedAt)}${tail}`;
      return layout ? `draft ${state.draft} by ${state.by ?? layout.updatedBy}${tail}` : "nothing written yet";
  }
}

function agoText(ms: number): string {
  const seconds = Math.max(0, Math.round(ms / 1000));
  if (seconds < 2) return "just now";
  return seconds < 120 ? `${seconds} s ago` : `${Math.round(seconds / 60)} min ago`;
}

/** The time, renewed each second while it is asked for. */
function useSeconds(wanted: boolean): number {
  const [now, setNow] = useState(() => Date.now());
  useEffect(() => {
    if (!wanted) return;
    const timer = setInterval(() => setNow(Date.now()), 1_000);
    return () => clearInterval(timer);
  }, [wanted]);
  return now;
}
