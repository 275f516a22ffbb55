import type { Trx } from "@/db/executor";
import { revokeAccessKeys } from "@/db/queries/keys";
import { spendLinks } from "@/db/queries/password-links";
import { assertEmailFree, type LockedPerson, lockPerson, updatePerson } from "@/db/queries/people";
import { endGrants, listOpenGrants } from "@/db/queries/role-grants";
import { endSessionsOf } from "@/db/queries/sessions";
import { needsSecondAdmin, stepsToRoles, TWO_ADMIN_ROLES } from "@/lib/domain/people-rules";
import type { Role } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";
import { welcomeMessage } from "@/lib/mail/people-messages";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { queueMail } from "@/lib/services/mail/queue-mail";
import type { PersonChange, PersonView } from "@/schemas/api/people";
import { confirmIdentity } from "./confirm-identity";
import { askForRoles, lockRolesAsAdmin, type RolesAsked } from "./grant-roles";
import { makeLink } from "./password-links";
import { getPersonView } from "./person-view";

/**
 * Changes a person's name, roles or whether they are active; the e-mail address until they have chosen a password.
 * Taking away is at once; reviewer and admin wait for a second admin.
 * @throws AppError `person.not_found`, `person.own_roles`, `person.own_account`, `person.wrong_state`, `person.exists`,
 *   `auth.password_wrong`; nothing is then written.
 */
export async function changePerson(ctx: PersonCtx, id: string, change: PersonChange): Promise<PersonView> {
  assertRole(ctx, "admin");
  assertNotOwn(ctx, id, change);
  await confirmIdentity(ctx, change);
  return ctx.db.transaction().execute(async (trx) => {
    await lockRolesAsAdmin(ctx, trx);
    const before = await lockPerson(trx, id);
    const named = await applyNames(ctx, trx, before, change);
    const activity = await applyActivity(ctx, trx, before, change.active);
    const roles = await applyRoles(
      ctx,
      trx,
      { ...before, ...named, active: change.active ?? before.active },
      change.roles,
    );
    const view = await getPersonView(ctx, trx, id);
    await appendEvent(ctx, trx, {
      action: "person.changed",
      subject: id,
      data: { ...activity, ...roles },
      texts: { name: change.name, email: change.email },
    });
    return view;
  });
}

function assertNotOwn(ctx: PersonCtx, id: string, change: PersonChange): void {
  if (id !== ctx.actor.id) return;
  if (change.roles !== undefined)
    throw new AppError("person.own_roles", { message: "Nobody changes their own roles; ask another admin." });
  if (change.active !== undefined)
    throw new AppError("person.own_account", { message: "Nobody deactivates themselves; ask another admin." });
}

/** An address is mended before it is used; later a change would hand the account to whoever reads the new mailbox. */
async function applyNames(
  ctx: PersonCtx,
  trx: Trx,
  before: LockedPerson,
  { name, email }: PersonChange,
): Promise<{ name?: string; email?: string }> {
  const change = { ...(name !== undefined && { name }), ...(email !== undefined && { email }) };
  if (Object.keys(change).length === 0) return change;
  if (email !== undefined && email !== before.email && before.passwordChosen) {
    throw new AppError("person.wrong_state", {
      message:
        "This person signs in with that address already. Add them anew under the other one and deactivate this account.",
    });
  }
  if (email !== undefined) await assertEmailFree(trx, email, before.id);
  await updatePerson(trx, before.id, change);
  if (email !== undefined && email !== before.email && before.active) {
    const link = await makeLink(ctx, trx, before.id, "invite");
    const message = welcomeMessage({ ...link, name: name ?? before.name, addedBy: ctx.actor.name });
    await queueMail(ctx, trx, { id: before.id, email }, message);
  }
  return change;
}

/** Deactivating ends whatever lets the person in, and the roles that take two admins to give. */
async function applyActivity(ctx: PersonCtx, trx: Trx, before: LockedPerson, active: boolean | undefined) {
  if (active === undefined || active === before.active) return {};
  await updatePerson(trx, before.id, { active });
  if (active) return { active };
  const at = ctx.now();
  const sessions = await endSessionsOf(trx, before.id, at);
  const keys = await revokeAccessKeys(trx, before.id, at);
  await spendLinks(trx, before.id, at);
  await endGrants(trx, before.id, TWO_ADMIN_ROLES, { endedBy: ctx.actor.id, endedAt: at });
  return { active, endedSessions: sessions, revokedKeys: keys };
}

async function applyRoles(
  ctx: PersonCtx,
  trx: Trx,
  person: LockedPerson,
  wanted: readonly Role[] | undefined,
): Promise<Partial<RolesAsked & { ended: Role[] }>> {
  if (wanted === undefined) return {};
  const open = (await listOpenGrants(trx, [person.id])).map((grant) => grant.role);
  const { ask, end } = stepsToRoles(open, wanted);
  if (!person.active && ask.some(needsSecondAdmin)) {
    throw new AppError("person.wrong_state", { message: "This person is deactivated; activate them first." });
  }
  await endGrants(trx, person.id, end, { endedBy: ctx.actor.id, endedAt: ctx.now() });
  return { ...(await askForRoles(ctx, trx, person, ask)), ended: end };
}
