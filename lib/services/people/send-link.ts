import { lockPerson } from "@/db/queries/people";
import { AppError } from "@/lib/errors";
import { newLinkMessage, welcomeMessage } from "@/lib/mail/people-messages";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { queueMail } from "@/lib/services/mail/queue-mail";
import { type Confirmation, confirmIdentity } from "./confirm-identity";
import { makeLink } from "./password-links";

/**
 * Mails a person a new link, whether they never used the first one or lost password or one-time code. Nothing changes until
 * they use it; then their sessions end and the one-time code is taken away.
 * @throws AppError `person.not_found`, `person.own_account`, `person.wrong_state` where deactivated, `auth.password_wrong`
 */
export async function sendLink(ctx: PersonCtx, personId: string, signed: Confirmation): Promise<void> {
  assertRole(ctx, "admin");
  if (personId === ctx.actor.id)
    throw new AppError("person.own_account", { message: "Another admin sends you a link, or ask for one at sign-in." });
  await confirmIdentity(ctx, signed);
  await ctx.db.transaction().execute(async (trx) => {
    const person = await lockPerson(trx, personId);
    if (!person.active)
      throw new AppError("person.wrong_state", { message: "This person is deactivated; activate them first." });
    const link = await makeLink(ctx, trx, personId, "invite");
    const message = person.passwordChosen
      ? newLinkMessage({ ...link, name: person.name, sentBy: ctx.actor.name })
      : welcomeMessage({ ...link, name: person.name, addedBy: ctx.actor.name });
    await queueMail(ctx, trx, person, message);
    await appendEvent(ctx, trx, { action: "person.link-sent", subject: personId });
  });
}
