/** Roles as they were asked for, confirmed and ended: one row a grant, never taken out. */
import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { Role } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";

export interface GrantRow {
  id: string;
  personId: string;
  role: Role;
  /** Null for the product itself: first admin, set-up, demo. */
  askedBy: string | null;
  askedByName: string | null;
  askedAt: Date;
  confirmedBy: string | null;
  confirmedByName: string | null;
  confirmedAt: Date | null;
  endedAt: Date | null;
  endedByName: string | null;
}

function selectGrants(db: Db) {
  return db
    .selectFrom("roleGrant")
    .leftJoin("person as asker", "asker.id", "roleGrant.askedBy")
    .leftJoin("person as confirmer", "confirmer.id", "roleGrant.confirmedBy")
    .leftJoin("person as ender", "ender.id", "roleGrant.endedBy")
    .select([
      "roleGrant.id",
      "roleGrant.personId",
      sql<Role>`role_grant.role`.as("role"),
      "roleGrant.askedBy",
      "asker.name as askedByName",
      "roleGrant.askedAt",
      "roleGrant.confirmedBy",
      "confirmer.name as confirmedByName",
      "roleGrant.confirmedAt",
      "roleGrant.endedAt",
      "ender.name as endedByName",
    ]);
}

/** Grants that are not ended, of some people: held and waiting ones. */
export async function listOpenGrants(db: Db, personIds: readonly string[]): Promise<GrantRow[]> {
  if (personIds.length === 0) return [];
  return selectGrants(db)
    .where("roleGrant.personId", "in", personIds)
    .where("roleGrant.endedAt", "is", null)
    .orderBy("roleGrant.askedAt")
    .orderBy("roleGrant.id")
    .execute();
}

/** Every grant a person ever had, newest first. */
export async function listGrants(db: Db, personId: string): Promise<GrantRow[]> {
  return selectGrants(db).where("roleGrant.personId", "=", personId).orderBy("roleGrant.id", "desc").execute();
}

/** Lets changes of people's roles go through one after the other, until commit: what holds of all of them is judged on a fixed state. */
export async function lockRoles(trx: Trx): Promise<void> {
  await sql`select pg_advisory_xact_lock(7283002)`.execute(trx);
}

/** Whether an active person holds a role now, whatever the request's context said. */
export async function holdsRole(db: Db, personId: string, role: Role): Promise<boolean> {
  const { rows } = await sql<{ held: boolean }>`select has_role(${personId}, ${role}) as held`.execute(db);
  return rows[0]?.held === true;
}

export interface NewGrant {
  id: string;
  personId: string;
  role: Role;
  askedBy: string | null;
  askedAt: Date;
  confirmedBy: string | null;
  confirmedAt: Date | null;
}

/** @throws constraints `role_grant_open` → `role.exists`, `role_grant_not_own` → `person.own_roles`, `role_grant_second_admin` */
export async function insertGrant(trx: Trx, grant: NewGrant): Promise<void> {
  await trx.insertInto("roleGrant").values(grant).execute();
}

/** The grant that waits for a second admin, locked until commit. @throws AppError `role.not_found` */
export async function lockPendingGrant(
  trx: Trx,
  personId: string,
  role: Role,
): Promise<{ id: string; askedBy: string | null }> {
  return trx
    .selectFrom("roleGrant")
    .select(["id", "askedBy"])
    .where("personId", "=", personId)
    .where("role", "=", role)
    .where("confirmedAt", "is", null)
    .where("endedAt", "is", null)
    .forUpdate()
    .executeTakeFirstOrThrow(
      () =>
        new AppError("role.not_found", {
          role,
          message: `The role ${role} does not wait for confirmation; somebody may have decided already.`,
        }),
    );
}

/** @throws constraint `role_grant_second_admin` → `person.second_admin_needed` where the confirmer asked for it */
export async function confirmGrant(
  trx: Trx,
  id: string,
  by: { confirmedBy: string | null; confirmedAt: Date },
): Promise<void> {
  await trx.updateTable("roleGrant").set(by).where("id", "=", id).execute();
}

/** Ends a person's open grants of some roles. */
export async function endGrants(
  trx: Trx,
  personId: string,
  roles: readonly Role[],
  by: { endedBy: string; endedAt: Date },
): Promise<void> {
  if (roles.length === 0) return;
  await trx
    .updateTable("roleGrant")
    .set(by)
    .where("personId", "=", personId)
    .where("role", "in", [...roles])
    .where("endedAt", "is", null)
    .execute();
}

/** Active people who chose a password, by a role they hold. */
export async function countEligible(db: Db): Promise<Map<Role, number>> {
  const rows = await db
    .selectFrom("roleGrant")
    .innerJoin("person", "person.id", "roleGrant.personId")
    .select(sql<Role>`role_grant.role`.as("role"))
    .select((eb) => eb.fn.countAll<string>().as("count"))
    .where("roleGrant.confirmedAt", "is not", null)
    .where("roleGrant.endedAt", "is", null)
    .where("person.active", "=", true)
    .where("person.passwordHash", "is not", null)
    .groupBy("roleGrant.role")
    .execute();
  return new Map(rows.map(({ role, count }) => [role, Number(count)]));
}

/** Whether anybody active holds the role admin. */
export async function isAnyAdmin(db: Db): Promise<boolean> {
  const { rows } = await sql<{ there: boolean }>`
    select exists (
      select from role_grant g join person p on p.id = g.person_id
      where g.role = 'admin' and g.confirmed_at is not null and g.ended_at is null and p.active) as there
  `.execute(db);
  return rows[0]?.there === true;
}

/** Whether nobody but this person ever acted as admin: somebody named who chose no password yet has not. */
export async function isOnlyAdminEver(db: Db, personId: string): Promise<boolean> {
  const { rows } = await sql<{ other: boolean }>`
    select exists (
      select from role_grant g join person p on p.id = g.person_id
      where g.role = 'admin' and g.confirmed_at is not null and g.person_id <> ${personId}
        and p.password_hash is not null) as other
  `.execute(db);
  return rows[0]?.other === false;
}

/** Active admins who can sign in, apart from some people: who is told that a role waits for them. */
export async function listAdmins(
  db: Db,
  except: readonly string[],
): Promise<{ id: string; name: string; email: string }[]> {
  let query = db
    .selectFrom("person")
    .select(["id", "name", "email"])
    .where("active", "=", true)
    .where("passwordHash", "is not", null)
    .where(sql<boolean>`has_role(person.id, 'admin')`)
    .orderBy("id");
  if (except.length > 0) query = query.where("id", "not in", [...except]);
  return query.execute();
}
