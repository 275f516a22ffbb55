"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { useToast } from "@/app/_components/toast";
import { sendAgainAction } from "../actions";

/** Puts a message that did not get out on the queue again. */
export function SendAgain({ id }: { id: string }) {
  const router = useRouter();
  const tell = useToast();
  const [pending, setPending] = useState(false);
  const send = async () => {
    setPending(true);
    const result = await sendAgainAction(id);
    setPending(false);
    if (result.ok) tell({ tone: "good", title: "On its way again" });
    else tell({ tone: "bad", title: result.problem.title, text: result.problem.detail });
    router.refresh();
  };
  return (
    <Button look="outline" pending={pending} onClick={send}>
      Send again
    </Button>
  );
}
