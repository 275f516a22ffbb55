import { createTransport } from "nodemailer";
import { env } from "@/lib/env";
import { htmlOf } from "./html";

/** A server that says nothing for this long counts as gone; the queue tries again. */
const TIMEOUT_MS = 20_000;

export interface Outgoing {
  /** Named in `Message-ID`, so that a message sent twice by a retry is recognised as one. */
  id: string;
  to: string;
  subject: string;
  text: string;
}

/** Whether a mail server is set; without one messages stay on the mail page. */
export function isMailServerSet(): boolean {
  return env().smtpUrl !== undefined;
}

/** Sends one message through the server of `SMTP_URL`. @throws Error of the conversation, in the server's words */
export async function sendMessage(message: Outgoing): Promise<void> {
  const { smtpUrl, mailFrom, origin } = env();
  const timeouts = { connectionTimeout: TIMEOUT_MS, greetingTimeout: TIMEOUT_MS, socketTimeout: TIMEOUT_MS };
  const transport = createTransport({ url: smtpUrl, ...timeouts });
  try {
    await transport.sendMail({
      from: mailFrom,
      to: message.to,
      subject: message.subject,
      messageId: `<${message.id}@${new URL(origin).hostname}>`,
      text: message.text,
      html: htmlOf(message.text),
      headers: { "Auto-Submitted": "auto-generated" },
    });
  } finally {
    transport.close();
  }
}
