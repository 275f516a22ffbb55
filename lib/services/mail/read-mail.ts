import * as query from "@/db/queries/mail";
import { AppError } from "@/lib/errors";
import { enqueue } from "@/lib/jobs/enqueue";
import { isMailServerSet } from "@/lib/mail/send";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Page, pageOf } from "@/lib/services/page";
import type { MailMessage, MailSummary } from "@/schemas/api/mail";

function stateOf(row: query.MailSummaryRow): MailSummary["state"] {
  if (row.sentAt !== null) return "sent";
  if (row.keptAt !== null) return "kept";
  return row.lastError === null ? "waiting" : "failed";
}

function summaryOf(row: query.MailSummaryRow): MailSummary {
  const { id, subject, template, attempts, lastError } = row;
  return {
    id,
    to: row.toAddress,
    subject,
    template,
    state: stateOf(row),
    createdAt: row.createdAt.toISOString(),
    sentAt: row.sentAt?.toISOString() ?? null,
    attempts,
    lastError,
  };
}

/** Messages, newest first. @throws AppError `auth.forbidden` */
export async function listMail(ctx: PersonCtx, page: { limit: number; cursor?: string }): Promise<Page<MailSummary>> {
  assertRole(ctx, "admin");
  const rows = await query.listMail(ctx.db, { limit: page.limit + 1, before: page.cursor });
  return pageOf(rows.map(summaryOf), page.limit, (row) => row.id);
}

/** A message with its text. @throws AppError `mail.not_found`, `auth.forbidden` */
export async function getMail(ctx: PersonCtx, id: string): Promise<MailMessage> {
  assertRole(ctx, "admin");
  const row = await query.getMail(ctx.db, id);
  return { ...summaryOf(row), body: row.body };
}

/** Whether messages leave this server, for the page that says so. */
export function mayMailLeave(): boolean {
  return isMailServerSet();
}

/** Puts a message that did not get out on the queue again. @throws AppError `mail.not_found`, `mail.wrong_state` once it was sent */
export async function sendMailAgain(ctx: PersonCtx, id: string): Promise<void> {
  assertRole(ctx, "admin");
  await ctx.db.transaction().execute(async (trx) => {
    const mail = await query.lockMail(trx, id);
    if (stateOf(mail) === "sent" || stateOf(mail) === "waiting") {
      throw new AppError("mail.wrong_state", {
        state: stateOf(mail),
        message: "This message was sent, or is on its way already.",
      });
    }
    await query.updateMail(trx, id, { keptAt: null, lastError: null });
    await enqueue(trx, "send-mail", { mailId: id });
    await appendEvent(ctx, trx, { action: "mail.sent-again", subject: id, data: { template: mail.template } });
  });
}
