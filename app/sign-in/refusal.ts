import type { ProblemDetails } from "@/app/_components/api-client";
import { statusOf } from "@/lib/errors";

/** What the sign-in says of a code that came in the address, where a plain form was refused. */
const SENTENCES: Record<string, string> = {
  "auth.sign_in_failed": "E-mail or password is wrong. Check both and try again.",
  "auth.code_required": "Enter your password again together with the one-time code from your app.",
  "auth.code_wrong": "The one-time code is wrong; enter the one shown now.",
  "auth.too_many_attempts": "Too many wrong passwords or codes; wait 15 minutes.",
};

/** The refusal as problem details; anything unknown becomes a plain failure and is not shown as it came. */
export function refusalOf(code: string | undefined): ProblemDetails | null {
  if (code === undefined) return null;
  const detail = SENTENCES[code];
  if (detail === undefined)
    return { code: "auth.sign_in_failed", status: 401, title: "Not signed in", detail: "Try again." };
  return { code, detail, ...statusOf(code) };
}
