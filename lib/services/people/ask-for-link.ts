import { createHash } from "node:crypto";
import { countAttempts, insertAccess, lockAttempts } from "@/db/queries/access-log";
import { findCredentialByEmail, lockPerson } from "@/db/queries/people";
import { resetMessage } from "@/lib/mail/people-messages";
import type { Ctx } from "@/lib/services/context";
import { queueMail } from "@/lib/services/mail/queue-mail";
import { FIRST_ADMIN_EMAIL } from "./invite-first-admin";
import { makeLink } from "./password-links";

/** Links that one address may ask for within the window; more are dropped without a word. */
export const LINKS_MAX = 3;
const WINDOW_MS = 60 * 60 * 1000;

/** Mails a link to whoever has this address; does the same to the eye where nobody has, or asks too often. */
export async function askForLink(ctx: Ctx, email: string): Promise<void> {
  const at = ctx.now();
  const subject = createHash("sha256").update(email).digest("hex");
  await ctx.db.transaction().execute(async (trx) => {
    await lockAttempts(trx, "link.asked", subject);
    const asked = await countAttempts(trx, "link.asked", subject, new Date(at.getTime() - WINDOW_MS));
    const found = email === FIRST_ADMIN_EMAIL ? undefined : await findCredentialByEmail(trx, email);
    const personId = found?.personId ?? null;
    await insertAccess(trx, { at, kind: "link.asked", personId, address: ctx.address, detail: { subject } });
    if (asked >= LINKS_MAX || found === undefined) return;
    const person = await lockPerson(trx, found.personId);
    if (!person.active) return;
    const link = await makeLink(ctx, trx, person.id, "reset");
    await queueMail(ctx, trx, person, resetMessage({ ...link, name: person.name }));
  });
}
