import { sql } from "kysely";
import type { Db } from "@/db/executor";

export interface MailedPerson {
  id: string;
  name: string;
  email: string;
}

/** Active reviewers who had no hand in something: those who may decide over it. By name. */
export async function listDeciders(db: Db, subject: "derivation" | "package", id: string): Promise<MailedPerson[]> {
  const { rows } = await sql<MailedPerson>`
    select id, name, email from person
    where active and has_role(id, 'reviewer') and not is_maker(${subject}, ${id}::uuid, id)
    order by name
  `.execute(db);
  return rows;
}

/** Active people who derived, excluded for or imported a derivation: those whose work a decision is about. By name. */
export async function listAuthors(db: Db, derivationId: string): Promise<MailedPerson[]> {
  const { rows } = await sql<MailedPerson>`
    select distinct p.id, p.name, p.email from maker m join person p on p.id = m.person_id
    where m.subject_kind = 'derivation' and m.subject_id = ${derivationId}::uuid
      and m.act in ('derived', 'excluded', 'imported') and p.active
    order by p.name
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
