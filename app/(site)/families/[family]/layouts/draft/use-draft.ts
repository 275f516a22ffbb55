"use client";

import { useCallback, useEffect, useRef, useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { setOut } from "@/lib/domain/json-set-out";
import { dropCopy, writeCopy } from "./local-copy";
import { type DraftNews, hearStored } from "./stored-draft";
import { type Answer, useStoredDraft } from "./use-stored-draft";

/** Somebody else's text, saved over the same draft. */
export interface DraftConflict {
  /** What both began with; null where that is not known any more. */
  base: string | null;
  theirs: string;
  draft: number;
  by: string;
  at: string;
}

export interface DraftState {
  /** `kept`: not stored on the server yet, but in this browser. */
  status: "saved" | "typing" | "saving" | "offline" | "kept" | "refused";
  /** Milliseconds of this browser's clock; undefined until something was saved here. */
  savedAt: number | undefined;
  draft: number | undefined;
  unfinished: boolean;
  problem: ProblemDetails | null;
  /** Who wrote what stands here, where that is not told by `savedAt`. */
  by: string | undefined;
  conflict: DraftConflict | null;
  /** What happened elsewhere, before a save from here met it. */
  news: DraftNews | null;
}

interface Kept {
  draft: number;
  unfinished: boolean;
}

interface DraftOptions {
  family: string;
  /** Absent for a layout that is not stored yet. */
  version: string | undefined;
  draft: number | undefined;
  unfinished: boolean;
  writable: boolean;
}

const IDLE_MS = 1_200;
const RETRY_MS = 5_000;

/** Keeps a draft's text on the server while it is typed, and in this browser until it is there. */
export function useDraft({ family, version, draft, unfinished, writable }: DraftOptions) {
  const begin = { savedAt: undefined, draft, unfinished, problem: null, by: undefined, conflict: null, news: null };
  const [state, setState] = useState<DraftState>({ status: "saved", ...begin });
  // What timers and late answers need is held outside of rendering.
  const held = useRef({
    opened: false,
    text: "",
    saved: "",
    draft,
    busy: undefined as Promise<boolean> | undefined,
    blocked: false,
  });
  const timer = useRef<ReturnType<typeof setTimeout>>(undefined);
  const change = useCallback((part: Partial<DraftState>) => setState((before) => ({ ...before, ...part })), []);

  /** Goes on from a draft that the server has: what is typed from now on is saved over it. */
  const rest = useCallback(
    ({ saved, draft, by }: { saved: string; draft: number; by: string }) => {
      const now = held.current;
      Object.assign(now, { saved, draft, blocked: false });
      const status = now.text === saved ? "saved" : "typing";
      if (status === "saved") dropCopy(family, version);
      change({ conflict: null, news: null, problem: null, savedAt: undefined, draft, by, status });
    },
    [family, version, change],
  );

  /** Saves what stands. @returns whether the server has it now. */
  const save = useCallback(async (): Promise<boolean> => {
    const now = held.current;
    clearTimeout(timer.current);
    if (now.busy) await now.busy;
    if (!version || now.blocked) return false;
    if (now.text === now.saved) return true;
    now.busy = send();
    const done = await now.busy;
    now.busy = undefined;
    return done;

    async function send(): Promise<boolean> {
      const sent = now.text;
      change({ status: "saving" });
      try {
        const path = `/api/v1/families/${family}/layouts/${version}/text?draft=${now.draft}`;
        const kept = await callApi<Kept>(path, { method: "PUT", body: sent, contentType: "text/plain" });
        const { draft, unfinished } = kept;
        const base = { draft, unfinished, problem: null, news: null, savedAt: Date.now() };
        Object.assign(now, { saved: sent, draft: kept.draft });
        const typing = now.text !== sent;
        if (!typing) dropCopy(family, version);
        else timer.current = setTimeout(() => void save(), IDLE_MS);
        change({ ...base, status: typing ? "typing" : "saved" });
        return !typing;
      } catch (error) {
        return fail(problemOf(error), sent);
      }
    }

    function fail(problem: ProblemDetails, sent: string): boolean {
      if (problem.code === "layout.draft_changed") {
        const conflict = conflictOf(problem, now.saved);
        if (conflict.theirs === sent) {
          // The save before got through, its answer did not.
          rest({ saved: sent, draft: conflict.draft, by: conflict.by });
          if (now.text !== sent) timer.current = setTimeout(() => void save(), IDLE_MS);
          return now.text === sent;
        }
        now.blocked = true;
        change({ status: "refused", conflict, news: null });
      } else if (problem.status === 0 || problem.status >= 500) {
        timer.current = setTimeout(() => void save(), RETRY_MS);
        change({ status: "offline" });
      } else {
        now.blocked = problem.code !== "auth.required";
        change({ status: "refused", problem });
      }
      return false;
    }
  }, [family, version, change, rest]);

  /** The editor's text changed. */
  const type = useCallback(
    (text: string) => {
      const now = held.current;
      now.text = text;
      if (!writable) return;
      if (text === now.saved) return change({ status: "saved" });
      const copied = writeCopy(family, version, {
        text,
        at: new Date().toISOString(),
        ...(now.draft && { draft: now.draft }),
      });
      change({ status: version || !copied ? "typing" : "kept" });
      clearTimeout(timer.current);
      if (version && !now.blocked) timer.current = setTimeout(() => void save(), IDLE_MS);
    },
    [family, version, writable, save, change],
  );

  /** The editor is there with its text: nothing of it is new. */
  const open = useCallback((text: string) => Object.assign(held.current, { opened: true, text, saved: text }), []);

  /** Somebody else's draft was looked at, and what to go on with was chosen. */
  const settle = useCallback(({ theirs, draft, by }: DraftConflict) => rest({ saved: theirs, draft, by }), [rest]);

  /** The other text is looked at before a save met it: nothing is saved until one is chosen. */
  const meet = useCallback(
    (conflict: DraftConflict) => {
      held.current.blocked = true;
      clearTimeout(timer.current);
      change({ conflict, news: null, status: "refused" });
    },
    [change],
  );

  /** How the draft is stored was asked. */
  const hear = useCallback(
    ({ known, stored }: Answer) => {
      const now = held.current;
      // A save on its way, done since or refused says it better.
      if (!now.opened || now.busy || now.blocked || known !== now.draft) return;
      const heard = hearStored(now, stored);
      if (heard.kind === "adopt") rest(heard);
      else change({ news: heard.kind === "news" ? heard.news : null });
    },
    [rest, change],
  );
  const known = useCallback(() => held.current.draft, []);
  useStoredDraft({ family, version, watched: writable && state.conflict === null, known, onAnswer: hear });

  useEffect(() => () => clearTimeout(timer.current), []);
  return { state, type, open, save, settle, meet };
}

function conflictOf(problem: ProblemDetails, base: string): DraftConflict {
  const { source, now, updatedBy, updatedAt } = problem as ProblemDetails & Record<string, unknown>;
  return { base, theirs: setOut(String(source)), draft: Number(now), by: String(updatedBy), at: String(updatedAt) };
}
