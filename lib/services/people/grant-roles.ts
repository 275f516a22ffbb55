import type { Trx } from "@/db/executor";
import { holdsRole, insertGrant, isOnlyAdminEver, listAdmins, lockRoles } from "@/db/queries/role-grants";
import { needsSecondAdmin } from "@/lib/domain/people-rules";
import type { Role } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";
import { roleToConfirmMessage } from "@/lib/mail/people-messages";
import type { PersonCtx } from "@/lib/services/context";
import { queueMail } from "@/lib/services/mail/queue-mail";

/**
 * Takes the lock under which people's roles change, and makes sure that who asks is an admin even now. As nobody ends their
 * own role, one admin is always left, whoever removes whom at the same time. @throws AppError `auth.forbidden`
 */
export async function lockRolesAsAdmin(ctx: PersonCtx, trx: Trx): Promise<void> {
  await lockRoles(trx);
  if (await holdsRole(trx, ctx.actor.id, "admin")) return;
  throw new AppError("auth.forbidden", { needs: ["admin"], message: "You are no admin any more." });
}

export interface RolesAsked {
  granted: Role[];
  /** Wait for a second admin. */
  asked: Role[];
  /** Granted by the first admin alone, as there is no second one yet who could confirm. */
  setUp: boolean;
}

/**
 * Gives roles to a person: at once, or waiting for a second admin, who is told by mail. Until a second admin has chosen a
 * password the first one grants alone, else nobody could ever become the second.
 */
export async function askForRoles(
  ctx: PersonCtx,
  trx: Trx,
  person: { id: string; name: string },
  roles: readonly Role[],
): Promise<RolesAsked> {
  const setUp = roles.some(needsSecondAdmin) && (await isOnlyAdminEver(trx, ctx.actor.id));
  const at = ctx.now();
  const result: RolesAsked = { granted: [], asked: [], setUp };
  for (const role of roles) {
    const waits = needsSecondAdmin(role) && !setUp;
    const askedBy = needsSecondAdmin(role) && setUp ? null : ctx.actor.id;
    const decision = waits ? { confirmedBy: null, confirmedAt: null } : { confirmedBy: askedBy, confirmedAt: at };
    await insertGrant(trx, { id: ctx.newId(), personId: person.id, role, askedBy, askedAt: at, ...decision });
    if (waits) await tellAdmins(ctx, trx, person, role);
    (waits ? result.asked : result.granted).push(role);
  }
  return result;
}

async function tellAdmins(ctx: PersonCtx, trx: Trx, person: { id: string; name: string }, role: Role): Promise<void> {
  for (const admin of await listAdmins(trx, [ctx.actor.id, person.id])) {
    const message = roleToConfirmMessage({ to: admin.name, name: person.name, role, askedBy: ctx.actor.name });
    await queueMail(ctx, trx, admin, message);
  }
}
