import type { Db } from "@/db/executor";

export interface ReplyKey {
  actorId: string;
  route: string;
  key: string;
}

/** How long a stored reply answers a repeated request. */
export const KEPT_MS = 24 * 60 * 60 * 1000;

/** Claims a key; returns the earlier claim where there is one younger than 24 h. */
export async function insertIdempotentReply(
  db: Db,
  claim: ReplyKey & { bodySha256: Buffer; createdAt: Date },
): Promise<{ bodySha256: Buffer; status: number | null; body: unknown } | undefined> {
  await db
    .deleteFrom("idempotentReply")
    .where("actorId", "=", claim.actorId)
    .where("route", "=", claim.route)
    .where("key", "=", claim.key)
    .where("createdAt", "<", new Date(claim.createdAt.getTime() - KEPT_MS))
    .execute();
  const inserted = await db
    .insertInto("idempotentReply")
    .values(claim)
    .onConflict((conflict) => conflict.doNothing())
    .executeTakeFirst();
  if (inserted.numInsertedOrUpdatedRows === 1n) return undefined;
  return db
    .selectFrom("idempotentReply")
    .select(["bodySha256", "status", "body"])
    .where("actorId", "=", claim.actorId)
    .where("route", "=", claim.route)
    .where("key", "=", claim.key)
    .executeTakeFirst();
}

/** Keeps the reply of a claimed key. */
export async function storeIdempotentReply(db: Db, key: ReplyKey, status: number, body: unknown): Promise<void> {
  await db
    .updateTable("idempotentReply")
    .set({ status, body: JSON.stringify(body) })
    .where("actorId", "=", key.actorId)
    .where("route", "=", key.route)
    .where("key", "=", key.key)
    .execute();
}

/** Gives a claimed key free again. */
export async function deleteIdempotentReply(db: Db, key: ReplyKey): Promise<void> {
  await db
    .deleteFrom("idempotentReply")
    .where("actorId", "=", key.actorId)
    .where("route", "=", key.route)
    .where("key", "=", key.key)
    .execute();
}

/** Deletes replies older than their time. @returns how many */
export async function deleteRepliesBefore(db: Db, before: Date): Promise<number> {
  const result = await db.deleteFrom("idempotentReply").where("createdAt", "<", before).executeTakeFirst();
  return Number(result.numDeletedRows);
}
