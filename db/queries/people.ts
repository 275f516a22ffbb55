import { sql } from "kysely";
import type { Db } from "@/db/executor";
import type { Role } from "@/lib/domain/roles";

/** Roles a person holds now: granted, confirmed where a second admin is needed, and not ended. For queries over `person`. */
export const heldRoles = sql<Role[]>`array(
  select g.role from role_grant g
  where g.person_id = person.id and g.confirmed_at is not null and g.ended_at is null
  order by g.asked_at, g.role)`;

export interface Holder {
  personId: string;
  name: string;
  email: string;
  roles: Role[];
}

/** The active person behind a session that still lasts. */
export async function findSessionHolder(
  db: Db,
  sessionId: string,
  now: Date,
): Promise<(Holder & { lastSeenAt: Date }) | undefined> {
  return db
    .selectFrom("session")
    .innerJoin("person", "person.id", "session.personId")
    .select(["person.id as personId", "person.name", "person.email", "session.lastSeenAt", heldRoles.as("roles")])
    .where("session.id", "=", sessionId)
    .where("session.endedAt", "is", null)
    .where("session.expiresAt", ">", now)
    .where("person.active", "=", true)
    .executeTakeFirst();
}
