import type { Db } from "@/db/executor";
import { findSessionHolder } from "@/db/queries/people";
import { touchSession } from "@/db/queries/sessions";
import { isDueForTouch } from "@/lib/domain/credentials";
import type { PersonActor } from "@/lib/services/context";

/** The person of a browser session as the database knows them now; undefined once it ended, expired or they were deactivated. */
export async function findSessionActor(
  db: Db,
  sessionId: string,
  now: Date,
): Promise<(PersonActor & { email: string; expiresAt: Date }) | undefined> {
  const holder = await findSessionHolder(db, sessionId, now);
  if (holder === undefined) return undefined;
  if (isDueForTouch(holder.lastSeenAt, now)) await touchSession(db, sessionId, now);
  const { personId, name, email, roles, expiresAt } = holder;
  return { kind: "person", id: personId, name, email, roles, via: "session", sessionId, expiresAt };
}
