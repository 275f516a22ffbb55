import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** Files of a package beside its images, by name, without their content. */
export function listPackageFiles(
  db: Db,
  packageId: string,
): Promise<{ name: string; sha256: Buffer; bytes: number }[]> {
  return db
    .selectFrom("packageFile")
    .select(["name", "sha256", sql<number>`coalesce(byte_count, length(content))`.as("bytes")])
    .where("packageId", "=", packageId)
    .orderBy("name")
    .execute();
}

export interface SubjectEventRow {
  seq: number;
  at: Date;
  action: string;
  subject: string;
  /** Name of who did it now; null for the product itself and for stations. */
  actorName: string | null;
  hash: Buffer;
}

/** Ledger events of some subjects, oldest first. */
export async function listEventsOfSubjects(db: Db, subjects: readonly string[]): Promise<SubjectEventRow[]> {
  const { rows } = await sql<SubjectEventRow>`
    select e.seq::int as seq, e.at, e.action, e.subject, p.name as actor_name, e.hash
    from ledger_event e left join person p on p.id::text = e.actor
    where e.subject = any(${subjects as string[]}::text[])
    order by e.seq
  `.execute(db);
  return rows;
}

/** Active people who hold the role of reviewer, by name. */
export async function listReviewers(db: Db): Promise<{ id: string; name: string }[]> {
  const { rows } = await sql<{ id: string; name: string }>`
    select id, name from person where has_role(id, 'reviewer') order by name
  `.execute(db);
  return rows;
}
