"use client";

import { useCallback, useEffect, useRef, useState } from "react";
import type { GivenRow } from "@/lib/domain/readings/given-table";
import type { Ask, Checked, CheckOptions, TableFacts, TableOptions, Tell } from "./worker-messages";

export interface ReadingsFile {
  file?: File;
  facts?: TableFacts;
  /** What the rows hold against the rules, once they were checked as they are mapped now. */
  checked?: Checked;
  /** What is being done, and how far it is, 0 to 1. */
  busy?: { step: "reading" | "checking"; share: number };
  /** Why the file can't be read. */
  fault?: string;
}

const START: ReadingsFile = {};

/** A file of readings that a worker reads and checks. */
export function useReadingsFile() {
  const [state, setState] = useState(START);
  const worker = useRef<Worker>(undefined);
  const checks = useRef(0);
  const asked = useRef(0);
  const waiting = useRef(new Map<number, (rows: Record<number, GivenRow>) => void>());

  const stop = useCallback(() => {
    worker.current?.terminate();
    worker.current = undefined;
  }, []);
  useEffect(() => stop, [stop]);

  const hear = useCallback((message: Tell) => {
    if (message.tell === "rows") waiting.current.get(message.id)?.(message.rows);
    else if (message.tell === "checked" && message.id !== checks.current) return;
    else setState((before) => after(before, message));
  }, []);

  const open = useCallback(
    (file: File, options: TableOptions = {}) => {
      stop();
      const started = new Worker(new URL("./readings.worker.ts", import.meta.url), { type: "module" });
      started.addEventListener("message", ({ data }: MessageEvent<Tell>) => hear(data));
      started.addEventListener("error", () =>
        hear({ tell: "failed", message: "The file can't be read here; reload the page and try again." }),
      );
      worker.current = started;
      setState({ file, busy: { step: "reading", share: 0 } });
      started.postMessage({ ask: "open", file, ...options } satisfies Ask);
    },
    [hear, stop],
  );

  const reread = useCallback((options: TableOptions) => {
    setState(({ file }) => ({ file, busy: { step: "reading", share: 0 } }));
    worker.current?.postMessage({ ask: "reread", ...options } satisfies Ask);
  }, []);

  const check = useCallback((options: CheckOptions) => {
    checks.current++;
    setState((before) => ({ ...before, checked: undefined, busy: { step: "checking", share: 0 } }));
    worker.current?.postMessage({ ask: "check", id: checks.current, check: options } satisfies Ask);
  }, []);

  /** Forgets a check that no longer fits what is chosen. */
  const uncheck = useCallback(() => {
    checks.current++;
    setState((before) => ({
      ...before,
      checked: undefined,
      busy: before.busy?.step === "reading" ? before.busy : undefined,
    }));
  }, []);

  /** The given rows behind rows of what was sent, by the latter. */
  const findRows = useCallback((sentRows: number[]) => {
    const id = ++asked.current;
    return new Promise<Record<number, GivenRow>>((resolve) => {
      waiting.current.set(id, resolve);
      worker.current?.postMessage({ ask: "rows", id, sentRows } satisfies Ask);
    });
  }, []);

  const clear = useCallback(() => {
    stop();
    setState(START);
  }, [stop]);

  return { ...state, open, reread, check, uncheck, findRows, clear };
}

function after(before: ReadingsFile, message: Exclude<Tell, { tell: "rows" }>): ReadingsFile {
  const { file, facts } = before;
  if (message.tell === "progress") {
    // A step that was given up may still tell of itself.
    return before.busy?.step === message.step
      ? { ...before, busy: { step: message.step, share: message.share } }
      : before;
  }
  if (message.tell === "table") return { file, facts: message.facts };
  if (message.tell === "checked") return { file, facts, checked: message.checked };
  return { file, fault: message.message };
}
