"use client";

import { useQueries, useQuery } from "@tanstack/react-query";
import { useCallback, useMemo, useState } from "react";
import { callApi } from "@/app/_components/api-client";
import type { Row } from "@/app/_components/table/column";

/** A part of a list that is answered from any place on. */
interface Part {
  /** Of the whole list; null while it is not known yet. */
  total: number | null;
  items: Row[];
}

export interface WindowedRows {
  /** As long as the list is known to be; undefined where a row is not loaded. */
  rows: readonly (Row | undefined)[];
  total: number | null;
  loading: boolean;
  error: Error | null;
  onSight: (first: number, last: number) => void;
  retry: () => void;
}

const WINDOW = 200;
/** What left sight is let go after so long, so that a list walked from end to end does not stay in memory. */
const KEPT_MS = 30_000;

/**
 * Rows of a list of any length: only the windows in sight, and the next one, are loaded.
 * @param endpoint takes `offset` and `limit`, answers `total` and `items`.
 * @param known length of the list where it is known otherwise.
 * @param least so many rows from the first on are loaded wherever the reader is.
 * @param toRow makes the shown row of an answered one. Has to stay the same function.
 */
export function useWindows(endpoint: string, known: number | null, toRow: (row: Row) => Row, least = 0): WindowedRows {
  const [sight, setSight] = useState<readonly [number, number]>([0, 0]);
  const onSight = useCallback((first: number, last: number) => {
    setSight([Math.floor(first / WINDOW), Math.floor(last / WINDOW)]);
  }, []);
  // The first window is always held: it tells how long the list is.
  const start = useQuery(windowQuery(endpoint, 0));
  const total = start.data?.total ?? known;
  const end = total === null ? 1 : Math.ceil(total / WINDOW);
  const windows = useMemo(() => {
    const [first, last] = sight;
    const wanted: number[] = [];
    for (let at = 1; at < end && at < Math.max(last + 2, Math.ceil(least / WINDOW)); at++) {
      if (at >= first - 1 || at * WINDOW < least) wanted.push(at);
    }
    return wanted;
  }, [sight, end, least]);
  const results = [start, ...useQueries({ queries: windows.map((at) => windowQuery(endpoint, at)) })];
  // Rows are made once for each part that arrives, not at every turn of the wheel.
  // biome-ignore lint/correctness/useExhaustiveDependencies: another maker makes other rows
  const made = useMemo(() => new WeakMap<Part, Row[]>(), [toRow]);
  const rows: (Row | undefined)[] = Array.from({ length: total ?? start.data?.items.length ?? 0 });
  results.forEach(({ data: part }, i) => {
    if (!part) return;
    const shown = made.get(part) ?? part.items.map(toRow);
    made.set(part, shown);
    const from = i === 0 ? 0 : (windows[i - 1] as number) * WINDOW;
    shown.forEach((row, offset) => {
      rows[from + offset] = row;
    });
  });
  const failed = results.find((result) => result.error);
  return {
    rows,
    total,
    loading: results.some((result) => result.isFetching),
    error: failed?.error ?? null,
    onSight,
    retry: () => void failed?.refetch(),
  };
}

/** One window of such a list, for whoever needs to wait for it. */
export function windowQuery(endpoint: string, at: number) {
  return {
    queryKey: ["window", endpoint, at],
    queryFn: ({ signal }: { signal: AbortSignal }) => callApi<Part>(addressOf(endpoint, at), { signal }),
    staleTime: Number.POSITIVE_INFINITY,
    gcTime: KEPT_MS,
  };
}

function addressOf(endpoint: string, window: number): string {
  const url = new URL(endpoint, globalThis.location.origin);
  url.searchParams.set("offset", String(window * WINDOW));
  url.searchParams.set("limit", String(WINDOW));
  return url.pathname + url.search;
}
