import { TextInput } from "@/app/_components/form/text-input";

export interface PasswordConfirmProps {
  /** The person has one-time codes enrolled. */
  oneTimeCode?: boolean;
  passwordError?: string;
  codeError?: string;
}

/** The password again, and the one-time code where enrolled: form fields `password` and `oneTimeCode`. */
export function PasswordConfirm({ oneTimeCode = false, passwordError, codeError }: PasswordConfirmProps) {
  return (
    <div className="flex flex-col gap-3">
      <TextInput
        label="Your password"
        name="password"
        type="password"
        autoComplete="current-password"
        required
        error={passwordError}
      />
      {oneTimeCode ? (
        <TextInput
          label="One-time code"
          name="oneTimeCode"
          inputMode="numeric"
          autoComplete="one-time-code"
          pattern="[0-9]{6}"
          maxLength={6}
          required
          code
          error={codeError}
        />
      ) : null}
    </div>
  );
}

/** Where a refusal belongs to one of the two fields, the props that show it there. */
export function passwordErrors(problem: { code: string; title: string } | null | undefined): PasswordConfirmProps {
  if (problem?.code === "auth.password_wrong") return { passwordError: "This is not your password. Try it again." };
  if (problem?.code === "auth.code_wrong") return { codeError: "The code is wrong or used up. Wait for the next one." };
  return {};
}
