import type { Trx } from "@/db/executor";
import { findCredentialByEmail, insertPerson } from "@/db/queries/people";
import { insertGrant, isAnyAdmin, lockRoles } from "@/db/queries/role-grants";
import { linkAddress } from "@/lib/mail/people-messages";
import type { Ctx } from "@/lib/services/context";
import { addLink } from "./password-links";

/** Stands for the first admin until they give their own address; `.invalid` reaches nobody (RFC 2606). */
export const FIRST_ADMIN_EMAIL = "first-admin@trimwright.invalid";
const LASTS_MS = 24 * 60 * 60 * 1000;

/**
 * A one-time link with which the first admin gives name, address and password, valid for 24 hours; undefined once somebody
 * has the role. Every start makes another; the first one used makes the others useless.
 */
export async function inviteFirstAdmin(ctx: Ctx): Promise<{ url: string } | undefined> {
  return ctx.db.transaction().execute(async (trx) => {
    await lockRoles(trx);
    if (await isAnyAdmin(trx)) return undefined;
    const found = await findCredentialByEmail(trx, FIRST_ADMIN_EMAIL);
    const personId = found?.personId ?? (await addFirstAdmin(ctx, trx));
    const { token } = await addLink(ctx, trx, { personId, purpose: "invite", lastsMs: LASTS_MS });
    return { url: linkAddress(token) };
  });
}

/** Somebody without name, address or password, whose role is confirmed when the link is used. */
async function addFirstAdmin(ctx: Ctx, trx: Trx): Promise<string> {
  const id = ctx.newId();
  const at = ctx.now();
  await insertPerson(trx, { id, name: "First admin", email: FIRST_ADMIN_EMAIL, createdAt: at, createdBy: null });
  const grant = { personId: id, role: "admin" as const, askedBy: null, askedAt: at };
  await insertGrant(trx, { ...grant, id: ctx.newId(), confirmedBy: null, confirmedAt: null });
  return id;
}
