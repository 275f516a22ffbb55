import { sql } from "kysely";
import type { Db } from "@/db/executor";
import type { Role } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";

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

export interface Credential {
  personId: string;
  name: string;
  active: boolean;
  passwordHash: string | null;
  /** Base32; counts only once enrolled. */
  oneTimeSecret: string | null;
  oneTimeEnrolledAt: Date | null;
}

function selectCredential(db: Db) {
  return db
    .selectFrom("person")
    .select(["id as personId", "name", "active", "passwordHash", "oneTimeSecret", "oneTimeEnrolledAt"]);
}

/** What a person proves themselves with. @throws AppError `person.not_found` */
export function getCredential(db: Db, personId: string): Promise<Credential> {
  return selectCredential(db)
    .where("id", "=", personId)
    .executeTakeFirstOrThrow(() => new AppError("person.not_found", { id: personId }));
}

export function findCredentialByEmail(db: Db, email: string): Promise<Credential | undefined> {
  return selectCredential(db).where("email", "=", email.trim().toLowerCase()).executeTakeFirst();
}

/** Marks a one-time code's time step as used. @returns false where it, or a later one, was used before */
export async function takeOneTimeStep(db: Db, personId: string, step: number): Promise<boolean> {
  const result = await db
    .updateTable("person")
    .set({ oneTimeLastStep: step })
    .where("id", "=", personId)
    .where((eb) => eb.or([eb("oneTimeLastStep", "is", null), eb("oneTimeLastStep", "<", String(step))]))
    .executeTakeFirst();
  return result.numUpdatedRows === 1n;
}
