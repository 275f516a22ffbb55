import type { Trx } from "@/db/executor";
import { insertMail } from "@/db/queries/mail";
import { enqueue } from "@/lib/jobs/enqueue";
import type { Message } from "@/lib/mail/message";
import type { Ctx } from "@/lib/services/context";

export interface Recipient {
  /** Null where it is nobody's account. */
  id: string | null;
  email: string;
}

/** Queues a message in the caller's transaction: it is sent exactly if what it tells of was stored. @returns its id */
export async function queueMail(ctx: Ctx, trx: Trx, to: Recipient, message: Message): Promise<string> {
  const id = ctx.newId();
  await insertMail(trx, {
    id,
    personId: to.id,
    toAddress: to.email,
    template: message.template,
    subject: message.subject,
    body: message.text,
    createdAt: ctx.now(),
  });
  await enqueue(trx, "send-mail", { mailId: id });
  return id;
}
