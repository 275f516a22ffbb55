import { getMail, updateMail } from "@/db/queries/mail";
import { isMailServerSet, sendMessage } from "@/lib/mail/send";
import type { Ctx } from "@/lib/services/context";

const ERROR_MAX = 500;
/** A link's token in a message's text. */
const TOKEN = /\/welcome\/[\w-]{20,}/g;

/**
 * Sends a queued message, or marks it as kept here where no mail server is set. Once it is sent, its link is blotted out
 * in what is stored: the mailbox has it. @throws what the conversation threw, after noting it; the queue tries again
 */
export async function sendQueuedMail(ctx: Ctx, { mailId }: { mailId: string }): Promise<void> {
  const mail = await getMail(ctx.db, mailId);
  if (mail.sentAt !== null) return;
  if (!isMailServerSet()) return updateMail(ctx.db, mailId, { keptAt: ctx.now() });
  const attempts = mail.attempts + 1;
  try {
    await sendMessage({ id: mail.id, to: mail.toAddress, subject: mail.subject, text: mail.body });
  } catch (error) {
    const lastError = (error instanceof Error ? error.message : String(error)).slice(0, ERROR_MAX);
    await updateMail(ctx.db, mailId, { attempts, lastError, keptAt: null });
    throw error;
  }
  await updateMail(ctx.db, mailId, {
    attempts,
    sentAt: ctx.now(),
    keptAt: null,
    lastError: null,
    body: mail.body.replaceAll(TOKEN, "/welcome/…"),
  });
}
