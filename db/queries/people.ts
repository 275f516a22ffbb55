import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import { isUuid } from "@/db/queries/code-or-id";
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
): Promise<(Holder & { lastSeenAt: Date; expiresAt: Date }) | undefined> {
  return db
    .selectFrom("session")
    .innerJoin("person", "person.id", "session.personId")
    .select([
      "person.id as personId",
      "person.name",
      "person.email",
      "session.lastSeenAt",
      "session.expiresAt",
      heldRoles.as("roles"),
    ])
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

const personColumns = ["id", "name", "email", "active", "createdAt", "oneTimeEnrolledAt"] as const;

export interface PersonRow {
  id: string;
  name: string;
  email: string;
  active: boolean;
  createdAt: Date;
  oneTimeEnrolledAt: Date | null;
  passwordChosen: boolean;
  lastSeenAt: Date | null;
}

function selectPeople(db: Db) {
  return db
    .selectFrom("person")
    .select(personColumns)
    .select(sql<boolean>`person.password_hash is not null`.as("passwordChosen"))
    .select((eb) =>
      eb
        .selectFrom("session")
        .whereRef("session.personId", "=", "person.id")
        .select((inner) => inner.fn.max("session.lastSeenAt").as("seen"))
        .as("lastSeenAt"),
    );
}

/** People in the order they were added; `after` is the last id of the page before. */
export function listPeople(db: Db, page: { limit: number; after?: string }): Promise<PersonRow[]> {
  let query = selectPeople(db).orderBy("id").limit(page.limit);
  if (page.after !== undefined) query = query.where("id", ">", page.after);
  return query.execute();
}

function noSuchPerson(id: string): AppError {
  return new AppError("person.not_found", { id, message: "There is no such person." });
}

/** A person; an id that is none is nobody's. @throws AppError `person.not_found` */
export async function getPerson(db: Db, id: string): Promise<PersonRow> {
  if (!isUuid(id)) throw noSuchPerson(id);
  return selectPeople(db)
    .where("id", "=", id)
    .executeTakeFirstOrThrow(() => noSuchPerson(id));
}

export type LockedPerson = Omit<PersonRow, "lastSeenAt"> & { oneTimeSecret: string | null };

/** A person, locked until commit. @throws AppError `person.not_found` */
export function lockPerson(trx: Trx, id: string): Promise<LockedPerson> {
  return trx
    .selectFrom("person")
    .select([...personColumns, "oneTimeSecret"])
    .select(sql<boolean>`person.password_hash is not null`.as("passwordChosen"))
    .where("id", "=", id)
    .forUpdate()
    .executeTakeFirstOrThrow(() => noSuchPerson(id));
}

export interface NewPerson {
  id: string;
  email: string;
  name: string;
  createdAt: Date;
  createdBy: string | null;
}

/** Refuses an address that somebody else signs in with. @throws AppError `person.exists` */
export async function assertEmailFree(trx: Trx, email: string, personId: string): Promise<void> {
  const query = trx.selectFrom("person").select("id").where("email", "=", email).where("id", "<>", personId);
  if ((await query.executeTakeFirst()) === undefined) return;
  const message = "Somebody has this address already; an address is one person's.";
  throw new AppError("person.exists", { errors: [{ path: "/email", code: "person.exists", message }], message });
}

/** @throws constraint `person_email_unique` → `person.exists` */
export async function insertPerson(trx: Trx, person: NewPerson): Promise<void> {
  await trx.insertInto("person").values(person).execute();
}

export interface PersonChange {
  name?: string;
  email?: string;
  active?: boolean;
  passwordHash?: string;
  oneTimeSecret?: string | null;
  oneTimeEnrolledAt?: Date | null;
  oneTimeLastStep?: number | null;
}

/** @throws constraint `person_email_unique` → `person.exists` */
export async function updatePerson(trx: Trx, id: string, change: PersonChange): Promise<void> {
  await trx.updateTable("person").set(change).where("id", "=", id).execute();
}
