"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { useToast } from "@/app/_components/toast";
import type { LayoutView } from "@/lib/services/layouts/get-layout";
import { moveLayoutAction } from "../layout-actions";
import { dropCopy } from "./local-copy";

export type LayoutMove = "submit" | "take-back";

/** What a writer does with a layout beside writing it: stores a new one, asks for publishing, takes that back. */
export function useLayoutMoves(family: string, layout: LayoutView | undefined, save: () => Promise<boolean>) {
  const router = useRouter();
  const tell = useToast();
  const [pending, setPending] = useState<"add" | LayoutMove>();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);

  const add = async (text: string) => {
    setPending("add");
    try {
      const call = { method: "POST", body: text, contentType: "application/json" } as const;
      const stored = await callApi<LayoutView>(`/api/v1/families/${family}/layouts`, call);
      dropCopy(family, undefined);
      tell({ tone: "good", title: `Layout ${stored.version} is a draft now; it is saved as you type` });
      router.replace(`/families/${family}/layouts/${stored.version}`);
    } catch (error) {
      setProblem(problemOf(error));
      setPending(undefined);
    }
  };
  const move = async (name: LayoutMove) => {
    if (!layout) return;
    setPending(name);
    if (name === "submit" && !(await save())) return setPending(undefined);
    const result = await moveLayoutAction({ code: family, version: layout.version }, name);
    setPending(undefined);
    setProblem(result.ok ? null : result.problem);
    if (!result.ok) return;
    const words = name === "submit" ? "It waits for a second person now" : "It is a draft again";
    tell({ tone: "good", title: `Layout ${layout.version}`, text: words });
    router.refresh();
  };
  return { pending, problem, add, move };
}
