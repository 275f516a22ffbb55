"use client";

import { type ReactNode, useState } from "react";
import { type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Dialog } from "@/app/_components/dialog";
import { FormError } from "@/app/_components/form/form-error";
import { PasswordConfirm, passwordErrors } from "@/app/_components/form/password-confirm";
import { TextArea } from "@/app/_components/form/text-area";

export interface Confirmation {
  reason?: string;
  password?: string;
  oneTimeCode?: string;
}

export interface ConfirmDialogProps {
  open: boolean;
  onOpenChange: (open: boolean) => void;
  title: string;
  /** What happens then, and what it can't undo. */
  description?: ReactNode;
  /** The outcome as a verb: "Withdraw release 1.2.0". */
  confirm: string;
  danger?: boolean;
  reason?: "required" | "optional" | "none";
  password?: boolean;
  oneTimeCode?: boolean;
  /** Further fields of the form. */
  children?: ReactNode;
  /**
   * Does it. The dialog closes when the promise settles well; a thrown `ApiError` or a returned problem is shown inside
   * and everything typed stays. `form` has the further fields.
   */
  onConfirm: (values: Confirmation, form: FormData) => Promise<ProblemDetails | null | undefined>;
}

/** Asks before something of consequence: the reason, and the password where the deed has to be signed. */
export function ConfirmDialog(props: ConfirmDialogProps) {
  const { open, onOpenChange, title, description, confirm, danger, reason = "none", password, oneTimeCode } = props;
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);

  const send = async (form: FormData) => {
    setPending(true);
    const result = await props.onConfirm(readConfirmation(form), form).catch(problemOf);
    setPending(false);
    setProblem(result ?? null);
    if (!result) onOpenChange(false);
  };
  const change = (next: boolean) => {
    setProblem(null);
    onOpenChange(next);
  };

  return (
    <Dialog open={open} onOpenChange={change} title={title} description={description}>
      <form
        className="flex flex-col gap-3"
        onSubmit={(event) => {
          event.preventDefault();
          void send(new FormData(event.currentTarget));
        }}
      >
        {props.children}
        {reason === "none" ? null : (
          <TextArea
            label={reason === "required" ? "Reason" : "Reason, if there is one"}
            name="reason"
            required={reason === "required"}
            maxLength={2000}
            help="Stands in the ledger for ever; write it for somebody who wasn't there."
          />
        )}
        {password ? <PasswordConfirm oneTimeCode={oneTimeCode} {...passwordErrors(problem)} /> : null}
        <FormError problem={problem} />
        <div className="mt-1 flex flex-wrap justify-end gap-2.5">
          <Button onClick={() => change(false)}>Leave it</Button>
          <Button type="submit" look={danger ? "danger" : "primary"} pending={pending}>
            {confirm}
          </Button>
        </div>
      </form>
    </Dialog>
  );
}

/** The members a decision takes, from form fields of these names; empty ones are left out. */
export function readConfirmation(form: FormData): Confirmation {
  const text = (name: string) => {
    const value = form.get(name);
    return typeof value === "string" && value !== "" ? value : undefined;
  };
  return { reason: text("reason"), password: text("password"), oneTimeCode: text("oneTimeCode") };
}
