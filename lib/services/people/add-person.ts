import { assertEmailFree, insertPerson } from "@/db/queries/people";
import type { Role } from "@/lib/domain/roles";
import { welcomeMessage } from "@/lib/mail/people-messages";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { queueMail } from "@/lib/services/mail/queue-mail";
import type { NewPerson, PersonView } from "@/schemas/api/people";
import { confirmIdentity } from "./confirm-identity";
import { askForRoles, lockRolesAsAdmin } from "./grant-roles";
import { makeLink } from "./password-links";
import { getPersonView } from "./person-view";

/**
 * Adds a person, who gets a mailed link to choose a password: nobody else ever knows one.
 * @throws AppError `person.exists`, `auth.password_wrong`, `auth.forbidden`; nothing is then written and nothing mailed
 */
export async function addPerson(ctx: PersonCtx, input: NewPerson): Promise<PersonView> {
  assertRole(ctx, "admin");
  await confirmIdentity(ctx, input);
  const { name, email } = input;
  const id = ctx.newId();
  const roles = [...new Set<Role>(input.roles)];
  return ctx.db.transaction().execute(async (trx) => {
    await lockRolesAsAdmin(ctx, trx);
    await assertEmailFree(trx, email, id);
    await insertPerson(trx, { id, name, email, createdAt: ctx.now(), createdBy: ctx.actor.id });
    const asked = await askForRoles(ctx, trx, { id, name }, roles);
    const link = await makeLink(ctx, trx, id, "invite");
    await queueMail(ctx, trx, { id, email }, welcomeMessage({ ...link, name, addedBy: ctx.actor.name }));
    const view = await getPersonView(ctx, trx, id);
    await appendEvent(ctx, trx, {
      action: "person.added",
      subject: id,
      data: { ...asked },
      texts: { name, email },
    });
    return view;
  });
}
