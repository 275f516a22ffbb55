"use client";

import Link from "next/link";
import { type FormEvent, useEffect, useRef, useState } from "react";
import { type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { signIn } from "@/app/_components/auth-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FormError } from "@/app/_components/form/form-error";
import { TextInput } from "@/app/_components/form/text-input";
import { DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import type { DemoAccount } from "@/lib/services/account/list-demo-accounts";
import { DemoAccounts } from "./demo-accounts";

export interface SignInFormProps {
  /** Path of this site to go to afterwards. */
  goTo: string;
  /** Why a plain form was refused, before the scripts were there. */
  refused: ProblemDetails | null;
  accounts: readonly DemoAccount[];
}

const asksForCode = (problem: ProblemDetails | null) =>
  problem?.code === "auth.code_required" || problem?.code === "auth.code_wrong";

/** E-mail and password; the one-time code's field comes when the account asks for it. Nothing typed is lost on a refusal. */
export function SignInForm({ goTo, refused, accounts }: SignInFormProps) {
  const form = useRef<HTMLFormElement>(null);
  const [problem, setProblem] = useState(refused);
  const [pending, setPending] = useState(false);
  const [withCode, setWithCode] = useState(asksForCode(refused));

  useEffect(() => {
    if (problem) fieldOf(form.current, asksForCode(problem) ? "oneTimeCode" : "password")?.select();
  }, [problem]);

  async function submit(event: FormEvent<HTMLFormElement>) {
    event.preventDefault();
    const fields = new FormData(event.currentTarget);
    const text = (name: string) => String(fields.get(name) ?? "");
    setPending(true);
    try {
      await signIn({ email: text("email"), password: text("password"), oneTimeCode: text("oneTimeCode") });
      window.location.assign(goTo); // a new page load: nothing that another person saw stays in memory
    } catch (error) {
      const refusal = problemOf(error);
      setWithCode((before) => before || asksForCode(refusal));
      setProblem(refusal);
      setPending(false);
    }
  }

  function fillIn(account: DemoAccount) {
    const [email, password] = [fieldOf(form.current, "email"), fieldOf(form.current, "password")];
    if (!email || !password) return;
    email.value = account.email;
    password.value = DEMO_PASSWORD;
    setWithCode(false);
    setProblem(null);
    form.current?.querySelector("button")?.focus();
  }

  const wordsInField = problem?.code === "auth.code_wrong" ? problem.detail : undefined;
  return (
    <div
      className={`grid items-start gap-[18px] ${accounts.length > 0 ? "md:grid-cols-[minmax(0,400px)_minmax(0,1fr)]" : ""}`}
    >
      <Card>
        <h1 className="mb-3 text-lg">Sign in</h1>
        <form
          ref={form}
          method="post"
          action="/api/auth/callback/credentials"
          onSubmit={submit}
          className="flex flex-col gap-3"
        >
          <TextInput
            label="E-mail"
            name="email"
            type="email"
            autoComplete="username"
            maxLength={254}
            required
            autoFocus
          />
          <TextInput
            label="Password"
            name="password"
            type="password"
            autoComplete="current-password"
            maxLength={1000}
            required
          />
          {withCode ? (
            <TextInput
              label="One-time code"
              help="Six digits, from your authenticator app"
              name="oneTimeCode"
              inputMode="numeric"
              autoComplete="one-time-code"
              maxLength={7}
              required
              code
              error={wordsInField}
            />
          ) : null}
          {problem?.code === "auth.code_required" ? null : <FormError problem={problem} />}
          <Button type="submit" look="primary" wide pending={pending} pendingText="Signing in">
            Sign in
          </Button>
        </form>
        <p className="mt-3 text-sm text-ink-soft">
          <Link href="/forgot">Choose a new password</Link> by a mailed link. Accounts are made by an admin.
        </p>
      </Card>
      {accounts.length > 0 ? <DemoAccounts accounts={accounts} onChoose={fillIn} /> : null}
    </div>
  );
}

function fieldOf(form: HTMLFormElement | null, name: string): HTMLInputElement | undefined {
  const field = form?.elements.namedItem(name);
  return field instanceof HTMLInputElement ? field : undefined;
}
