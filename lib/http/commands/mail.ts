import { command } from "@/lib/http/command";
import * as service from "@/lib/services/mail/read-mail";
import { byId, idPageQuery } from "@/schemas/api/common";
import { mailList, mailMessage } from "@/schemas/api/mail";

/** Messages may carry links that choose a password: an admin in a browser reads them, a key does not. */
const admin = { who: "person", roles: ["admin"], session: true } as const;

export const listMail = command({
  id: "mail.list",
  method: "GET",
  path: "/mail",
  summary: "Messages, newest first",
  access: admin,
  query: idPageQuery,
  reply: { status: 200, schema: mailList },
  handle: (ctx, { query }) => service.listMail(ctx, query),
});

export const getMail = command({
  id: "mail.get",
  method: "GET",
  path: "/mail/{id}",
  summary: "A message with its text",
  access: admin,
  params: byId,
  reply: { status: 200, schema: mailMessage },
  errors: ["mail.not_found"],
  handle: (ctx, { params }) => service.getMail(ctx, params.id),
});

export const sendMailAgain = command({
  id: "mail.send-again",
  method: "POST",
  path: "/mail/{id}/send",
  summary: "Puts a message that did not get out on the queue again",
  access: admin,
  params: byId,
  reply: { status: 202, schema: mailMessage },
  errors: ["mail.not_found", "mail.wrong_state"],
  handle: async (ctx, { params }) => {
    await service.sendMailAgain(ctx, params.id);
    return service.getMail(ctx, params.id);
  },
});

export const mailCommands = [listMail, getMail, sendMailAgain];
