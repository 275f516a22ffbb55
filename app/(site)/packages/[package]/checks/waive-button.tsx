"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { useToast } from "@/app/_components/toast";
import { waiveCheckAction } from "../../actions";
import { checkName } from "../check-names";

export interface WaiveButtonProps {
  id: string;
  check: { code: string; message: string };
  oneTimeCode: boolean;
}

/** A reviewer's reasoned acceptance of one warning. */
export function WaiveButton({ id, check, oneTimeCode }: WaiveButtonProps) {
  const router = useRouter();
  const tell = useToast();
  const [open, setOpen] = useState(false);
  const name = checkName(check.code);

  const confirm = async (values: Confirmation) => {
    const result = await waiveCheckAction(id, { ...values, check: check.code });
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: `Waived: ${name}` });
    router.refresh();
    return null;
  };

  return (
    <>
      <Button look="outline" onClick={() => setOpen(true)}>
        Waive this warning
      </Button>
      <ConfirmDialog
        open={open}
        onOpenChange={setOpen}
        title={`Waive: ${name}`}
        description={
          <>
            {check.message} With your name and reason it no longer stands against a review; whoever signs the package
            sees both.
          </>
        }
        confirm="Waive it"
        reason="required"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={confirm}
      />
    </>
  );
}
