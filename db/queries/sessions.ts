import type { Db } from "@/db/executor";

export async function touchSession(db: Db, sessionId: string, now: Date): Promise<void> {
  await db.updateTable("session").set({ lastSeenAt: now }).where("id", "=", sessionId).execute();
}
