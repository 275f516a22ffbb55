"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { readConfirmation } from "@/app/_components/confirm-dialog";
import { errorAt } from "@/app/_components/form/error-at";
import { FormError } from "@/app/_components/form/form-error";
import { NewPassword, newPasswordOf } from "@/app/_components/form/new-password";
import { PasswordConfirm, passwordErrors } from "@/app/_components/form/password-confirm";
import { useToast } from "@/app/_components/toast";
import { changePasswordAction } from "./actions";

/** One's own password, with the old one. */
export function PasswordCard({ oneTimeCode }: { oneTimeCode: boolean }) {
  const router = useRouter();
  const tell = useToast();
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);

  const send = async (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const element = event.currentTarget;
    const form = new FormData(element);
    const typed = newPasswordOf(form);
    if (!typed.ok) return setProblem(typed.problem);
    const { password, oneTimeCode: code } = readConfirmation(form);
    setPending(true);
    const result = await changePasswordAction({ newPassword: typed.value, password, oneTimeCode: code });
    setPending(false);
    setProblem(result.ok ? null : result.problem);
    if (!result.ok) return;
    element.reset();
    tell({ tone: "good", title: "Password changed", text: "Your other sessions ended." });
    router.refresh();
  };

  return (
    <Card title="Password" note="changing it ends your other sessions">
      <form onSubmit={send} className="flex flex-col gap-3">
        <PasswordConfirm oneTimeCode={oneTimeCode} {...passwordErrors(problem)} />
        <NewPassword error={errorAt(problem, "/newPassword")} repeatError={errorAt(problem, "/repeat")} />
        <FormError problem={problem?.code === "password.not_accepted" ? null : problem} />
        <div className="flex justify-end">
          <Button type="submit" look="outline" pending={pending} pendingText="Changing">
            Change password
          </Button>
        </div>
      </form>
    </Card>
  );
}
