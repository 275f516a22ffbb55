"use client";

import { useQuery } from "@tanstack/react-query";
import { useEffect } from "react";
import { callApi, problemOf } from "@/app/_components/api-client";
import type { StoredDraft } from "./stored-draft";

/** A stored draft, and the number of the draft that was known when it was asked for. */
export interface Answer {
  known: number | undefined;
  stored: StoredDraft | "dropped";
}

const EVERY_MS = 20_000;

interface StoredDraftOptions {
  family: string;
  /** Absent for a layout that is not stored yet. */
  version: string | undefined;
  watched: boolean;
  /** Number of the draft that is known here. */
  known: () => number | undefined;
  /** Has to stay the same function. */
  onAnswer: (answer: Answer) => void;
}

/**
 * Asks how a draft is stored: every 20 seconds while the page is in sight, and when the window is come back to. A lost
 * connection is not spoken of; it is asked again when the line is back.
 */
export function useStoredDraft({ family, version, watched, known, onAnswer }: StoredDraftOptions): void {
  const enabled = watched && version !== undefined;
  const { data, dataUpdatedAt, refetch } = useQuery({
    queryKey: ["stored draft", family, version],
    queryFn: ({ signal }) => ask(`/api/v1/families/${family}/layouts/${version}/text`, known(), signal),
    enabled,
    refetchInterval: EVERY_MS,
    refetchOnWindowFocus: "always",
    staleTime: 0,
    gcTime: 0,
    retry: false,
  });
  // biome-ignore lint/correctness/useExhaustiveDependencies: an answer that says the same again may mean something else by now
  useEffect(() => {
    if (data && enabled) onAnswer(data);
  }, [data, dataUpdatedAt, enabled, onAnswer]);

  // Between two windows side by side neither is ever hidden.
  useEffect(() => {
    if (!enabled) return;
    const look = () => void refetch({ cancelRefetch: false });
    window.addEventListener("focus", look);
    return () => window.removeEventListener("focus", look);
  }, [enabled, refetch]);
}

async function ask(path: string, known: number | undefined, signal: AbortSignal): Promise<Answer> {
  try {
    return { known, stored: await callApi<StoredDraft>(known ? `${path}?draft=${known}` : path, { signal }) };
  } catch (error) {
    if (problemOf(error).code === "layout.not_found") return { known, stored: "dropped" };
    throw error;
  }
}
