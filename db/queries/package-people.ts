import { sql } from "kysely";
import type { Db } from "@/db/executor";
import type { MailedPerson } from "@/db/queries/derivation-people";

/** Active reviewers who had no hand in a package: those who may decide over it. By name. */
export async function listPackageDeciders(db: Db, packageId: string): Promise<MailedPerson[]> {
  const { rows } = await sql<MailedPerson>`
    select id, name, email from person
    where active and has_role(id, 'reviewer') and not is_maker('package', ${packageId}::uuid, id)
    order by name
  `.execute(db);
  return rows;
}

/** A person to write to; undefined once inactive. */
export function findMailedPerson(db: Db, personId: string): Promise<MailedPerson | undefined> {
  return db
    .selectFrom("person")
    .select(["id", "name", "email"])
    .where("id", "=", personId)
    .where("active", "=", true)
    .executeTakeFirst();
}
