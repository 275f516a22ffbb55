import type { Db, Trx } from "@/db/executor";
import { isUuid } from "@/db/queries/code-or-id";
import { AppError } from "@/lib/errors";

const summaryColumns = [
  "id",
  "toAddress",
  "template",
  "subject",
  "createdAt",
  "sentAt",
  "keptAt",
  "attempts",
  "lastError",
] as const;

export interface MailSummaryRow {
  id: string;
  toAddress: string;
  template: string;
  subject: string;
  createdAt: Date;
  sentAt: Date | null;
  /** Set where no mail server is configured, so that the message stays here. */
  keptAt: Date | null;
  attempts: number;
  lastError: string | null;
}

export interface MailRow extends MailSummaryRow {
  body: string;
}

export interface NewMail {
  id: string;
  personId: string | null;
  toAddress: string;
  template: string;
  subject: string;
  body: string;
  createdAt: Date;
}

function noSuchMail(id: string): AppError {
  return new AppError("mail.not_found", { id, message: "There is no such message." });
}

export async function insertMail(trx: Trx, mail: NewMail): Promise<void> {
  await trx.insertInto("mail").values(mail).execute();
}

/** Messages, newest first; `before` is the last id of the page before. */
export async function listMail(db: Db, page: { limit: number; before?: string }): Promise<MailSummaryRow[]> {
  let query = db.selectFrom("mail").select(summaryColumns).orderBy("id", "desc").limit(page.limit);
  if (page.before !== undefined) query = query.where("id", "<", page.before);
  return query.execute();
}

/** A message; an id that is none names none. @throws AppError `mail.not_found` */
export async function getMail(db: Db, id: string): Promise<MailRow> {
  if (!isUuid(id)) throw noSuchMail(id);
  return db
    .selectFrom("mail")
    .select([...summaryColumns, "body"])
    .where("id", "=", id)
    .executeTakeFirstOrThrow(() => noSuchMail(id));
}

/** The message, locked until commit. @throws AppError `mail.not_found` */
export async function lockMail(trx: Trx, id: string): Promise<MailRow> {
  return trx
    .selectFrom("mail")
    .select([...summaryColumns, "body"])
    .where("id", "=", id)
    .forUpdate()
    .executeTakeFirstOrThrow(() => noSuchMail(id));
}

export type MailChange = Partial<Pick<MailRow, "sentAt" | "keptAt" | "attempts" | "lastError" | "body">>;

export async function updateMail(db: Db, id: string, change: MailChange): Promise<void> {
  await db.updateTable("mail").set(change).where("id", "=", id).execute();
}

/** Deletes what is older than its retention. @returns how many messages */
export async function deleteMailBefore(db: Db, before: Date): Promise<number> {
  const result = await db.deleteFrom("mail").where("createdAt", "<", before).executeTakeFirst();
  return Number(result.numDeletedRows);
}
