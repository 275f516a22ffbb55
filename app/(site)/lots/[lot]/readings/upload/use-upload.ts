"use client";

import { useEffect, useRef, useState } from "react";
import { type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { type Sending, sendRun, type Uploaded } from "./send-run";

export interface Upload {
  sending?: { share: number };
  problem?: ProblemDetails;
  done?: Uploaded;
}

/** Sends a run and follows it. Leaving the page meanwhile asks first. */
export function useUpload() {
  const [upload, setUpload] = useState<Upload>({});
  const running = useRef<Sending>(undefined);
  const isSending = upload.sending !== undefined;
  useEffect(() => {
    if (!isSending) return;
    const ask = (event: BeforeUnloadEvent) => event.preventDefault();
    addEventListener("beforeunload", ask);
    return () => removeEventListener("beforeunload", ask);
  }, [isSending]);

  /** @returns the stored run or the refusal; neither where it was stopped */
  const send = async (path: string, body: Blob): Promise<Omit<Upload, "sending">> => {
    setUpload({ sending: { share: 0 } });
    running.current = sendRun(path, body, (share) => setUpload({ sending: { share } }));
    try {
      const done = await running.current.result;
      setUpload({ done });
      return { done };
    } catch (error) {
      const problem = problemOf(error);
      const outcome = problem.code === "upload.stopped" ? {} : { problem };
      setUpload(outcome);
      return outcome;
    }
  };
  return { ...upload, send, stop: () => running.current?.abort(), clear: () => setUpload({}) };
}
