"use client";

import { type FormEvent, useState } from "react";
import { type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { signIn } from "@/app/_components/auth-client";
import { Button } from "@/app/_components/button";
import { errorAt } from "@/app/_components/form/error-at";
import { FormError } from "@/app/_components/form/form-error";
import { NewPassword, newPasswordOf } from "@/app/_components/form/new-password";
import { TextInput } from "@/app/_components/form/text-input";
import { choosePasswordAction } from "../actions";

export interface ChoosePasswordProps {
  token: string;
  firstAdmin: boolean;
  /** Empty for the first admin, who gives it here. */
  email: string;
}

/** The form behind a link: a password, the first admin's name and address too; then straight in. */
export function ChoosePassword({ token, firstAdmin, email }: ChoosePasswordProps) {
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);

  const send = async (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const form = new FormData(event.currentTarget);
    const typed = newPasswordOf(form);
    if (!typed.ok) return setProblem(typed.problem);
    const names = firstAdmin ? { name: String(form.get("name")), email: String(form.get("email")) } : {};
    setPending(true);
    const result = await choosePasswordAction({ token, newPassword: typed.value, ...names }).catch((error) => ({
      ok: false as const,
      problem: problemOf(error),
    }));
    if (result.ok) return goIn(result.value.email, typed.value, firstAdmin ? "/people" : "/today");
    setPending(false);
    setProblem(result.problem);
  };

  return (
    <form onSubmit={send} className="flex flex-col gap-3">
      {firstAdmin ? (
        <>
          <TextInput
            label="Your name"
            name="name"
            autoComplete="name"
            required
            maxLength={120}
            error={errorAt(problem, "/name")}
          />
          <TextInput
            label="Your e-mail"
            name="email"
            type="email"
            autoComplete="username"
            required
            maxLength={254}
            help="You sign in with it."
            error={errorAt(problem, "/email")}
          />
        </>
      ) : (
        // For password managers, which keep the two together.
        <input type="hidden" name="username" autoComplete="username" value={email} readOnly />
      )}
      <NewPassword error={errorAt(problem, "/newPassword")} repeatError={errorAt(problem, "/repeat")} />
      <FormError problem={problem?.code === "password.not_accepted" ? null : problem} />
      <Button type="submit" look="primary" wide pending={pending} pendingText="Going in">
        Choose this password and sign in
      </Button>
    </form>
  );
}

/** Signs in with what was just chosen; where a one-time code is asked for, the sign-in page does. */
async function goIn(email: string, password: string, path: string): Promise<void> {
  const signedIn = await signIn({ email, password, oneTimeCode: "" }).then(
    () => true,
    () => false,
  );
  window.location.assign(signedIn ? path : "/sign-in");
}
