"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { FormError } from "@/app/_components/form/form-error";
import { useToast } from "@/app/_components/toast";
import { moveRevisionAction } from "../actions";

/** Asks for publishing, or takes the question back. */
export function RevisionAction({ code, number, move }: { code: string; number: number; move: "submit" | "take-back" }) {
  const router = useRouter();
  const tell = useToast();
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);

  const act = async () => {
    setPending(true);
    const result = await moveRevisionAction(code, number, move);
    setPending(false);
    setProblem(result.ok ? null : result.problem);
    if (!result.ok) return;
    tell({
      tone: "good",
      title: move === "submit" ? `Revision ${number} waits for a second person` : `Revision ${number} is a draft again`,
    });
    router.refresh();
  };

  return (
    <div className="flex flex-col gap-2">
      <Button look={move === "submit" ? "primary" : "quiet"} pending={pending} onClick={act}>
        {move === "submit" ? "Ask for publishing" : "Take back"}
      </Button>
      <FormError problem={problem} />
    </div>
  );
}
