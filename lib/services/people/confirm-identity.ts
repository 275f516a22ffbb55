import { type Credential, getCredential, takeOneTimeStep } from "@/db/queries/people";
import { AppError } from "@/lib/errors";
import { assertPerson, type Ctx } from "@/lib/services/context";
import { countedAttempt } from "./attempts";
import { findOneTimeStep } from "./one-time-code";
import { isPasswordRight } from "./password";

/** The password again and, where enrolled, a one-time code. */
export interface Confirmation {
  password: string;
  oneTimeCode?: string | undefined;
}

/**
 * Makes sure that the person signed in is at the keyboard. Call it before the decision's transaction: a failure is counted
 * even though nothing else is written, and hashing must not hold locks.
 * @throws AppError `auth.required`, `auth.session_required`, `auth.password_wrong`, `auth.code_wrong`, `auth.too_many_attempts`
 */
export async function confirmIdentity(ctx: Ctx, confirmation: Confirmation): Promise<void> {
  assertPerson(ctx);
  const { id, via } = ctx.actor;
  if (via !== "session") {
    throw new AppError("auth.session_required", {
      message: "This is decided by a signed-in person in a browser; a key cannot.",
    });
  }
  await countedAttempt(ctx, { kind: "confirm.failed", subject: id, personId: id }, async () => {
    const credential = await getCredential(ctx.db, id);
    if (!(await isPasswordRight(credential.passwordHash, confirmation.password))) {
      throw new AppError("auth.password_wrong", {
        message: "The password is wrong; nothing was done. Enter it again.",
      });
    }
    await assertOneTimeCode(ctx, credential, confirmation.oneTimeCode);
  });
}

/**
 * Asks for a one-time code where the person enrolled; each code works once.
 * @throws AppError `auth.code_wrong` for a missing, wrong or used code
 */
export async function assertOneTimeCode(ctx: Ctx, credential: Credential, code: string | undefined): Promise<void> {
  if (credential.oneTimeEnrolledAt === null || credential.oneTimeSecret === null) return;
  const step = code === undefined ? undefined : findOneTimeStep(credential.oneTimeSecret, code, ctx.now());
  if (step === undefined) {
    const message =
      code === undefined
        ? "Enter the one-time code from your app."
        : "The one-time code is wrong; enter the one shown now.";
    throw new AppError("auth.code_wrong", { message });
  }
  if (!(await takeOneTimeStep(ctx.db, credential.personId, step))) {
    throw new AppError("auth.code_wrong", { message: "That one-time code was used already; wait for the next one." });
  }
}
