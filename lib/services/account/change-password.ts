import { spendLinks } from "@/db/queries/password-links";
import { getPerson, lockPerson, updatePerson } from "@/db/queries/people";
import { endSessionsOf } from "@/db/queries/sessions";
import { AppError } from "@/lib/errors";
import { passwordChangedMessage } from "@/lib/mail/people-messages";
import type { PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { queueMail } from "@/lib/services/mail/queue-mail";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import { hashNewPassword } from "@/lib/services/people/set-password";

/**
 * Changes one's own password, ends one's other sessions and makes open links useless.
 * @throws AppError `auth.password_wrong`, `password.not_accepted`; nothing is then written.
 */
export async function changePassword(
  ctx: PersonCtx,
  { newPassword, ...signed }: Confirmation & { newPassword: string },
): Promise<void> {
  await confirmIdentity(ctx, signed);
  assertOther(newPassword, signed.password);
  const { id, email } = await getPerson(ctx.db, ctx.actor.id);
  const passwordHash = await hashNewPassword(newPassword, email);
  await ctx.db.transaction().execute(async (trx) => {
    const person = await lockPerson(trx, id);
    await updatePerson(trx, id, { passwordHash });
    const endedSessions = await endSessionsOf(trx, id, ctx.now(), ctx.actor.sessionId);
    await spendLinks(trx, id, ctx.now());
    await queueMail(ctx, trx, person, passwordChangedMessage(person));
    await appendEvent(ctx, trx, { action: "account.password-changed", subject: id, data: { endedSessions } });
  });
}

function assertOther(newPassword: string, old: string): void {
  if (newPassword !== old) return;
  const message = "This is the password you have; take another.";
  const errors = [{ path: "/newPassword", code: "password.not_accepted", message }];
  throw new AppError("password.not_accepted", { errors, message });
}
