"use client";

import { type FormEvent, useState } from "react";
import { type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { errorAt } from "@/app/_components/form/error-at";
import { FormError } from "@/app/_components/form/form-error";
import { TextInput } from "@/app/_components/form/text-input";
import { Notice } from "@/app/_components/notice";
import { askForLinkAction } from "./actions";

/** Asks for a link; says the same whether or not somebody has the address. */
export function ForgotForm() {
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const [asked, setAsked] = useState<string>();

  const send = async (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const email = String(new FormData(event.currentTarget).get("email"));
    setPending(true);
    const result = await askForLinkAction(email).catch((error) => ({ ok: false as const, problem: problemOf(error) }));
    setPending(false);
    setProblem(result.ok ? null : result.problem);
    if (result.ok) setAsked(email);
  };

  if (asked !== undefined) {
    return (
      <div role="status" className="mt-3">
        <Notice tone="good" title="Look into your mailbox">
          If somebody signs in with {asked}, a link is on its way there. It works for an hour; up to three an hour are
          sent.
        </Notice>
      </div>
    );
  }
  return (
    <form onSubmit={send} className="flex flex-col gap-3">
      <p className="text-sm text-ink-soft">You get a link with which you choose a new one.</p>
      <TextInput
        label="E-mail"
        name="email"
        type="email"
        autoComplete="username"
        required
        maxLength={254}
        autoFocus
        error={errorAt(problem, "/email")}
      />
      <FormError problem={problem?.errors ? null : problem} />
      <Button type="submit" look="primary" wide pending={pending} pendingText="Asking">
        Mail me a link
      </Button>
    </form>
  );
}
