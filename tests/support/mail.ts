import type { Db } from "@/db/executor";

export interface QueuedMail {
  id: string;
  personId: string | null;
  template: string;
  subject: string;
  body: string;
}

/** Messages to an address, oldest first. */
export function listMailTo(db: Db, address: string): Promise<QueuedMail[]> {
  return db
    .selectFrom("mail")
    .select(["id", "personId", "template", "subject", "body"])
    .where("toAddress", "=", address)
    .orderBy("id")
    .execute();
}

/** The token of the link that a message carries. @throws where it carries none */
export function tokenOf(mail: { body: string } | undefined): string {
  const token = /\/welcome\/([\w-]+)/.exec(mail?.body ?? "")?.[1];
  if (token === undefined) throw new Error("the message carries no link");
  return token;
}
