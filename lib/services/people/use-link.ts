import type { Trx } from "@/db/executor";
import { insertAccess } from "@/db/queries/access-log";
import { findLink, type LinkRow, spendLinks } from "@/db/queries/password-links";
import { assertEmailFree, lockPerson, type PersonChange, updatePerson } from "@/db/queries/people";
import { confirmGrant, isAnyAdmin, lockPendingGrant, lockRoles } from "@/db/queries/role-grants";
import { endSessionsOf } from "@/db/queries/sessions";
import { AppError } from "@/lib/errors";
import { passwordChangedMessage } from "@/lib/mail/people-messages";
import type { Ctx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { queueMail } from "@/lib/services/mail/queue-mail";
import { FIRST_ADMIN_EMAIL } from "./invite-first-admin";
import { tokenHashOf } from "./password-links";
import { hashNewPassword } from "./set-password";

export interface LinkView {
  state: "open" | "used" | "expired" | "unknown";
  /** Whose password is chosen; empty for the first admin, who gives a name and address then. */
  name: string;
  email: string;
  firstAdmin: boolean;
}

/** What a link's page shows. Looking uses nothing up. */
export async function describeLink(ctx: Ctx, token: string): Promise<LinkView> {
  const link = await findLink(ctx.db, tokenHashOf(token));
  if (link === undefined) return { state: "unknown", name: "", email: "", firstAdmin: false };
  const firstAdmin = link.email === FIRST_ADMIN_EMAIL;
  const { name, email } = firstAdmin ? { name: "", email: "" } : link;
  return { state: stateOf(link, ctx.now()), name, email, firstAdmin };
}

export interface LinkUse {
  token: string;
  newPassword: string;
  /** The first admin's only. */
  name?: string;
  email?: string;
}

/**
 * Chooses the password of a link's person. Ends their sessions and makes all their links useless; a link sent by an admin
 * also takes away the one-time code.
 * @throws AppError `link.not_found`, `link.used`, `link.expired`, `password.not_accepted`, `person.exists`; nothing is then written.
 */
export async function choosePassword(ctx: Ctx, use: LinkUse): Promise<{ email: string }> {
  const found = assertOpen(await findLink(ctx.db, tokenHashOf(use.token)), ctx.now());
  const first = found.email === FIRST_ADMIN_EMAIL ? namesOfFirst(use) : undefined;
  const email = first?.email ?? found.email;
  const passwordHash = await hashNewPassword(use.newPassword, email);
  return ctx.db.transaction().execute(async (trx) => {
    if (first) await lockRoles(trx);
    const person = await lockPerson(trx, found.personId);
    const link = assertOpen(await findLink(trx, tokenHashOf(use.token)), ctx.now());
    const codeGoes = link.purpose === "invite" && {
      oneTimeSecret: null,
      oneTimeEnrolledAt: null,
      oneTimeLastStep: null,
    };
    const change: PersonChange = { passwordHash, ...first, ...codeGoes };
    if (first) await assertEmailFree(trx, first.email, person.id);
    await updatePerson(trx, person.id, change);
    if (first) await confirmFirst(ctx, trx, person.id);
    await endSessionsOf(trx, person.id, ctx.now());
    await spendLinks(trx, person.id, ctx.now());
    await noteUse(ctx, trx, person.id);
    if (person.passwordChosen) await queueMail(ctx, trx, person, passwordChangedMessage(person));
    await appendEvent(asPerson(ctx, person.id), trx, {
      action: first ? "person.first-admin" : "person.password-chosen",
      subject: person.id,
      data: {
        purpose: link.purpose,
        oneTimeCodeRemoved: link.purpose === "invite" && person.oneTimeEnrolledAt !== null,
      },
      texts: { ...first },
    });
    return { email };
  });
}

function namesOfFirst({ name, email }: LinkUse): { name: string; email: string } {
  if (name !== undefined && email !== undefined) return { name, email };
  const lacking = name === undefined ? "/name" : "/email";
  const message = "The first admin gives a name and an e-mail address.";
  throw new AppError("request.invalid", { errors: [{ path: lacking, code: "request.invalid", message }], message });
}

/** Of several links printed by several starts one makes the first admin. */
async function confirmFirst(ctx: Ctx, trx: Trx, personId: string): Promise<void> {
  if (await isAnyAdmin(trx))
    throw new AppError("link.used", { message: "There is an admin already; ask them to add you." });
  const { id } = await lockPendingGrant(trx, personId, "admin");
  await confirmGrant(trx, id, { confirmedBy: null, confirmedAt: ctx.now() });
}

async function noteUse(ctx: Ctx, trx: Trx, personId: string): Promise<void> {
  await insertAccess(trx, { at: ctx.now(), kind: "link.used", personId, address: ctx.address });
}

/** Whoever holds the link acts as its person. */
function asPerson(ctx: Ctx, id: string): Ctx {
  return { ...ctx, actor: { kind: "person", id, name: "", roles: [], via: "session", sessionId: null } };
}

function stateOf(link: LinkRow, now: Date): "open" | "used" | "expired" {
  if (link.usedAt !== null) return "used";
  return link.expiresAt <= now || !link.active ? "expired" : "open";
}

function assertOpen(link: LinkRow | undefined, now: Date): LinkRow {
  const state = link && stateOf(link, now);
  if (link === undefined) throw new AppError("link.not_found", { message: "There is no such link; copy it whole." });
  if (state === "used")
    throw new AppError("link.used", { message: "This link was used, or a newer one was sent. Ask for a new one." });
  if (state === "expired") throw new AppError("link.expired", { message: "This link has run out. Ask for a new one." });
  return link;
}
