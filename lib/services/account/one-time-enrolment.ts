import { toSVG } from "bwip-js/node";
import { lockPerson, updatePerson } from "@/db/queries/people";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { countedAttempt } from "@/lib/services/people/attempts";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import { findOneTimeStep, newOneTimeSecret, oneTimeOf } from "@/lib/services/people/one-time-code";
import type { OneTimeSecret } from "@/schemas/api/account";

/**
 * Begins to enrol one-time codes: a secret for an authenticator app, as text and as a QR code. Nothing asks for codes until
 * {@link confirmOneTimeCode} has seen one. Beginning anew replaces the secret.
 * @throws AppError `auth.password_wrong`, `one-time-code.exists` where codes are enrolled
 */
export async function beginOneTimeCode(ctx: PersonCtx, signed: { password: string }): Promise<OneTimeSecret> {
  await confirmIdentity(ctx, signed);
  const secret = newOneTimeSecret();
  const email = await ctx.db.transaction().execute(async (trx) => {
    const person = await lockPerson(trx, ctx.actor.id);
    if (person.oneTimeEnrolledAt !== null)
      throw new AppError("one-time-code.exists", { message: "One-time codes are enrolled; remove them first." });
    await updatePerson(trx, person.id, { oneTimeSecret: secret, oneTimeLastStep: null });
    return person.email;
  });
  const uri = oneTimeOf(secret, email).toString();
  return { secret, uri, qrSvg: toSVG({ bcid: "qrcode", text: uri, scale: 3, padding: 4, backgroundcolor: "FFFFFF" }) };
}

/**
 * Ends enrolling with a code from the app: from then on decisions and signing in ask for one.
 * @throws AppError `one-time-code.wrong_state` before a beginning, `one-time-code.exists`, `auth.code_wrong`
 */
export async function confirmOneTimeCode(ctx: PersonCtx, code: string): Promise<void> {
  const { id } = ctx.actor;
  await countedAttempt(ctx, { kind: "confirm.failed", subject: id, personId: id }, () =>
    ctx.db.transaction().execute(async (trx) => {
      const { oneTimeSecret, oneTimeEnrolledAt } = await lockPerson(trx, id);
      if (oneTimeEnrolledAt !== null)
        throw new AppError("one-time-code.exists", { message: "One-time codes are enrolled already." });
      if (oneTimeSecret === null)
        throw new AppError("one-time-code.wrong_state", { message: "Begin to enrol first; that makes the secret." });
      const step = findOneTimeStep(oneTimeSecret, code, ctx.now());
      if (step === undefined)
        throw new AppError("auth.code_wrong", { message: "The code is wrong; enter the one that your app shows now." });
      await updatePerson(trx, id, { oneTimeEnrolledAt: ctx.now(), oneTimeLastStep: step });
      await appendEvent(ctx, trx, { action: "account.one-time-code-enrolled", subject: id });
    }),
  );
}

/** Takes one's one-time codes away, signed with one. @throws AppError `one-time-code.wrong_state`, `auth.password_wrong`, `auth.code_wrong` */
export async function removeOneTimeCode(ctx: PersonCtx, signed: Confirmation): Promise<void> {
  await confirmIdentity(ctx, signed);
  await ctx.db.transaction().execute(async (trx) => {
    const { id, oneTimeEnrolledAt } = await lockPerson(trx, ctx.actor.id);
    if (oneTimeEnrolledAt === null)
      throw new AppError("one-time-code.wrong_state", { message: "No one-time codes are enrolled." });
    await updatePerson(trx, id, { oneTimeSecret: null, oneTimeEnrolledAt: null, oneTimeLastStep: null });
    await appendEvent(ctx, trx, { action: "account.one-time-code-removed", subject: id });
  });
}
