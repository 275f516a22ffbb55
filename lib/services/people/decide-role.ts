import { lockPerson } from "@/db/queries/people";
import { confirmGrant, endGrants, lockPendingGrant } from "@/db/queries/role-grants";
import type { Role } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { PersonView } from "@/schemas/api/people";
import { type Confirmation, confirmIdentity } from "./confirm-identity";
import { lockRolesAsAdmin } from "./grant-roles";
import { getPersonView } from "./person-view";

export interface PendingKey {
  personId: string;
  role: Role;
}

/**
 * Confirms a role that another admin asked for; from then on the person holds it.
 * @throws AppError `role.not_found`, `person.second_admin_needed` for who asked, `person.own_roles` for who would get it,
 *   `person.wrong_state`, `auth.password_wrong`; nothing is then written.
 */
export async function confirmRole(ctx: PersonCtx, key: PendingKey, signed: Confirmation): Promise<PersonView> {
  assertRole(ctx, "admin");
  assertNotOwn(ctx, key);
  await confirmIdentity(ctx, signed);
  return ctx.db.transaction().execute(async (trx) => {
    await lockRolesAsAdmin(ctx, trx);
    const person = await lockPerson(trx, key.personId);
    const grant = await lockPendingGrant(trx, key.personId, key.role);
    if (grant.askedBy === ctx.actor.id) {
      throw new AppError("person.second_admin_needed", {
        message: "You asked for this role; another admin confirms it.",
      });
    }
    if (!person.active) {
      throw new AppError("person.wrong_state", { message: "This person is deactivated; activate them first." });
    }
    await confirmGrant(trx, grant.id, { confirmedBy: ctx.actor.id, confirmedAt: ctx.now() });
    const view = await getPersonView(ctx, trx, key.personId);
    const data = { role: key.role, askedBy: grant.askedBy };
    await appendEvent(ctx, trx, { action: "role.confirmed", subject: key.personId, data });
    return view;
  });
}

/** Refuses a role that waits, or takes back what one asked for. @throws AppError `role.not_found`, `person.own_roles`, `auth.password_wrong` */
export async function refuseRole(
  ctx: PersonCtx,
  key: PendingKey,
  { reason, ...signed }: Confirmation & { reason?: string },
): Promise<PersonView> {
  assertRole(ctx, "admin");
  assertNotOwn(ctx, key);
  await confirmIdentity(ctx, signed);
  return ctx.db.transaction().execute(async (trx) => {
    await lockRolesAsAdmin(ctx, trx);
    await lockPerson(trx, key.personId);
    const { askedBy } = await lockPendingGrant(trx, key.personId, key.role);
    await endGrants(trx, key.personId, [key.role], { endedBy: ctx.actor.id, endedAt: ctx.now() });
    const view = await getPersonView(ctx, trx, key.personId);
    const event = { action: "role.refused", subject: key.personId, data: { role: key.role, askedBy } };
    await appendEvent(ctx, trx, { ...event, texts: { reason } });
    return view;
  });
}

function assertNotOwn(ctx: PersonCtx, key: PendingKey): void {
  if (key.personId === ctx.actor.id)
    throw new AppError("person.own_roles", { message: "Nobody decides on their own roles; another admin does." });
}
