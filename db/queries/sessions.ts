import type { Db, Trx } from "@/db/executor";

export interface NewSession {
  id: string;
  personId: string;
  createdAt: Date;
  expiresAt: Date;
  userAgent: string;
  address: string;
}

export async function insertSession(db: Db, session: NewSession): Promise<void> {
  await db
    .insertInto("session")
    .values({ ...session, lastSeenAt: session.createdAt })
    .execute();
}

export async function touchSession(db: Db, sessionId: string, now: Date): Promise<void> {
  await db.updateTable("session").set({ lastSeenAt: now }).where("id", "=", sessionId).execute();
}

/** Ends a session. @returns whose it was; undefined where there is none or it had ended */
export async function endSession(db: Db, sessionId: string, now: Date): Promise<string | undefined> {
  const row = await db
    .updateTable("session")
    .set({ endedAt: now })
    .where("id", "=", sessionId)
    .where("endedAt", "is", null)
    .returning("personId")
    .executeTakeFirst();
  return row?.personId;
}

export interface SessionRow {
  id: string;
  createdAt: Date;
  lastSeenAt: Date;
  expiresAt: Date;
  userAgent: string;
  address: string;
}

/** A person's sessions that last, newest first; `before` is the last id of the page before. */
export function listSessions(
  db: Db,
  personId: string,
  page: { now: Date; limit: number; before?: string },
): Promise<SessionRow[]> {
  let query = db
    .selectFrom("session")
    .select(["id", "createdAt", "lastSeenAt", "expiresAt", "userAgent", "address"])
    .where("personId", "=", personId)
    .where("endedAt", "is", null)
    .where("expiresAt", ">", page.now)
    .orderBy("id", "desc")
    .limit(page.limit);
  if (page.before !== undefined) query = query.where("id", "<", page.before);
  return query.execute();
}

/** Ends one session of a person. @returns false where the person has no such session, or it ended before */
export async function endSessionOf(db: Db, personId: string, sessionId: string, endedAt: Date): Promise<boolean> {
  const result = await db
    .updateTable("session")
    .set({ endedAt })
    .where("id", "=", sessionId)
    .where("personId", "=", personId)
    .where("endedAt", "is", null)
    .executeTakeFirst();
  return result.numUpdatedRows === 1n;
}

/** Ends a person's sessions, all but one where one is named. @returns how many */
export async function endSessionsOf(
  trx: Trx,
  personId: string,
  endedAt: Date,
  except: string | null = null,
): Promise<number> {
  let query = trx.updateTable("session").set({ endedAt }).where("personId", "=", personId).where("endedAt", "is", null);
  if (except !== null) query = query.where("id", "<>", except);
  const result = await query.executeTakeFirst();
  return Number(result.numUpdatedRows);
}

/** Deletes sessions that ended or ran out before a time. @returns how many */
export async function deleteSessionsBefore(db: Db, before: Date): Promise<number> {
  const result = await db
    .deleteFrom("session")
    .where((eb) => eb.or([eb("endedAt", "<", before), eb("expiresAt", "<", before)]))
    .executeTakeFirst();
  return Number(result.numDeletedRows);
}
