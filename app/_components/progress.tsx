"use client";

import { useQuery } from "@tanstack/react-query";
import { useRouter } from "next/navigation";
import { useEffect, useRef } from "react";
import { callApi } from "@/app/_components/api-client";
import { formatCount } from "@/lib/domain/format/figure";
import { formatDuration } from "@/lib/domain/format/time";

export interface ProgressState {
  done: number;
  /** 0 while it isn't known yet. */
  total: number;
  /** What is being done, as "checking images". */
  step?: string;
}

/** A bar with counts and the time left. */
export function ProgressBar({
  label,
  done,
  total,
  step,
  secondsLeft,
}: ProgressState & { label: string; secondsLeft?: number }) {
  const share = total > 0 ? Math.min(1, done / total) : 0;
  return (
    <div>
      <div className="mb-1 flex flex-wrap items-baseline gap-x-3 text-sm">
        <span className="font-semibold">{label}</span>
        {step ? <span className="text-ink-soft">{step}</span> : null}
        <span className="ml-auto text-ink-soft">
          {total > 0 ? `${formatCount(done)} of ${formatCount(total)}` : "beginning"}
          {secondsLeft === undefined ? "" : `, about ${formatDuration(secondsLeft)} left${step ? " of this step" : ""}`}
        </span>
      </div>
      <div
        role="progressbar"
        aria-label={label}
        aria-valuemin={0}
        aria-valuemax={total || 1}
        aria-valuenow={done}
        className="h-2 overflow-hidden rounded border border-rule bg-sunk"
      >
        <div className="h-full bg-copper transition-[width]" style={{ width: `${share * 100}%` }} />
      </div>
    </div>
  );
}

export interface ProgressProps {
  label: string;
  /** Address whose JSON has `state` and `progress: {done, total, step}`. */
  endpoint: string;
  /** States in which work goes on, as `["building"]`. */
  running: readonly string[];
  initial?: ProgressState;
}

interface Watched {
  state: string;
  progress?: ProgressState | null;
}

/** Follows long work until it ends, then renders the page anew. Leaving the page doesn't stop the work. */
export function Progress({ label, endpoint, running, initial }: ProgressProps) {
  const router = useRouter();
  const start = useRef<{ at: number; done: number }>(undefined);
  const { data, error } = useQuery({
    queryKey: ["progress", endpoint],
    queryFn: ({ signal }) => callApi<Watched>(endpoint, { signal }),
    refetchInterval: ({ state }) => (state.data && !running.includes(state.data.state) ? false : 1_000),
    staleTime: 0,
    retry: true,
  });
  const finished = data !== undefined && !running.includes(data.state);
  useEffect(() => {
    if (finished) router.refresh();
  }, [finished, router]);

  const progress = data?.progress ?? initial ?? { done: 0, total: 0 };
  return (
    <div className="flex flex-col gap-1.5">
      <ProgressBar label={label} {...progress} secondsLeft={finished ? undefined : secondsLeft(start, progress)} />
      <p className="text-xs text-ink-soft" role="status">
        {finished
          ? "Finished."
          : error
            ? "No connection; the work goes on and is asked for again."
            : "You may leave this page; the work goes on."}
      </p>
    </div>
  );
}

/** From the pace since this page began to look; undefined until there is one. */
function secondsLeft(
  start: { current?: { at: number; done: number } },
  { done, total }: ProgressState,
): number | undefined {
  const now = performance.now();
  if (!start.current || start.current.done > done) start.current = { at: now, done };
  const { at, done: before } = start.current;
  if (done === before || total === 0 || done >= total) return undefined;
  const seconds = ((now - at) / 1_000 / (done - before)) * (total - done);
  return seconds < 1 ? undefined : seconds;
}
