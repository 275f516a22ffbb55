/** One-time links with which people choose a password, known by the SHA-256 of their token only. */
import type { Db, Trx } from "@/db/executor";

/** `invite`: sent by an admin, also takes away a lost one-time code; `reset`: asked for by the person, leaves it. */
export type LinkPurpose = "invite" | "reset";

export interface LinkRow {
  personId: string;
  purpose: LinkPurpose;
  createdAt: Date;
  expiresAt: Date;
  usedAt: Date | null;
  name: string;
  email: string;
  active: boolean;
}

function selectLink(db: Db, tokenHash: Buffer) {
  return db
    .selectFrom("passwordLink")
    .innerJoin("person", "person.id", "passwordLink.personId")
    .select([
      "passwordLink.personId",
      "passwordLink.purpose",
      "passwordLink.createdAt",
      "passwordLink.expiresAt",
      "passwordLink.usedAt",
      "person.name",
      "person.email",
      "person.active",
    ])
    .where("passwordLink.tokenHash", "=", tokenHash);
}

/** The link of a token. Whoever changes a person's links holds the person's lock, so that under it this is final. */
export async function findLink(db: Db, tokenHash: Buffer): Promise<LinkRow | undefined> {
  const row = await selectLink(db, tokenHash).executeTakeFirst();
  return row && { ...row, purpose: row.purpose as LinkPurpose };
}

export interface NewLink {
  tokenHash: Buffer;
  personId: string;
  purpose: LinkPurpose;
  createdAt: Date;
  expiresAt: Date;
}

export async function insertLink(db: Db, link: NewLink): Promise<void> {
  await db.insertInto("passwordLink").values(link).execute();
}

/** Makes all open links of a person useless: one was used, a newer one was sent, or the person was deactivated. */
export async function spendLinks(trx: Trx, personId: string, usedAt: Date): Promise<void> {
  await trx
    .updateTable("passwordLink")
    .set({ usedAt })
    .where("personId", "=", personId)
    .where("usedAt", "is", null)
    .execute();
}

/** Deletes links that were used or ran out before a time. @returns how many */
export async function deleteLinksBefore(db: Db, before: Date): Promise<number> {
  const result = await db
    .deleteFrom("passwordLink")
    .where((eb) => eb.or([eb("usedAt", "<", before), eb("expiresAt", "<", before)]))
    .executeTakeFirst();
  return Number(result.numDeletedRows);
}
