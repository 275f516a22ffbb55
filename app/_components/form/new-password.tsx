import type { ProblemDetails } from "@/app/_components/api-client";
import { TextInput } from "@/app/_components/form/text-input";
import { PASSWORD_MIN } from "@/lib/domain/password-rule";

/** A new password, typed twice: form fields `newPassword` and `repeat`. */
export function NewPassword({ error, repeatError }: { error?: string; repeatError?: string }) {
  return (
    <>
      <TextInput
        label="New password"
        name="newPassword"
        type="password"
        autoComplete="new-password"
        minLength={PASSWORD_MIN}
        maxLength={1_000}
        required
        help={`At least ${PASSWORD_MIN} characters. A few words that don't belong together are easy to keep.`}
        error={error}
      />
      <TextInput
        label="New password again"
        name="repeat"
        type="password"
        autoComplete="new-password"
        maxLength={1_000}
        required
        error={repeatError}
      />
    </>
  );
}

/** The password of a form with {@link NewPassword}, if both fields agree. */
export function newPasswordOf(form: FormData): { ok: true; value: string } | { ok: false; problem: ProblemDetails } {
  const value = String(form.get("newPassword"));
  if (value === form.get("repeat")) return { ok: true, value };
  const message = "This is not what stands above.";
  const errors = [{ path: "/repeat", code: "password.not_accepted", message }];
  return { ok: false, problem: { code: "password.not_accepted", title: "Type it twice alike", status: 422, errors } };
}
