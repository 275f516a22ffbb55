import { z } from "zod";
import { id, pageOf, timestamp } from "@/schemas/api/common";

export const mailState = z.enum(["waiting", "sent", "kept", "failed"]);

export const mailSummary = z.object({
  id,
  to: z.string(),
  subject: z.string(),
  template: z.string(),
  state: mailState.meta({
    description:
      "kept: no mail server is set, so that it stays here; failed: the server refused it, tried again by itself up to three times",
  }),
  createdAt: timestamp,
  sentAt: timestamp.nullable(),
  attempts: z.number().int(),
  lastError: z.string().nullable(),
});

export const mailList = pageOf(mailSummary);
export const mailMessage = mailSummary.extend({ body: z.string() });

export type MailSummary = z.output<typeof mailSummary>;
export type MailMessage = z.output<typeof mailMessage>;
