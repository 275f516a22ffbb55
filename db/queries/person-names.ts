import type { Db } from "@/db/executor";

/** Names of people by id, for showing who did something. Ids that are null or unknown have no entry. */
export async function listPersonNames(db: Db, ids: readonly (string | null)[]): Promise<Map<string, string>> {
  const wanted = [...new Set(ids.filter((id) => id !== null))];
  if (wanted.length === 0) return new Map();
  const rows = await db.selectFrom("person").select(["id", "name"]).where("id", "in", wanted).execute();
  return new Map(rows.map((row) => [row.id, row.name]));
}

/** Whether a person has one-time codes enrolled, so that decisions ask for one. */
export async function isOneTimeEnrolled(db: Db, personId: string): Promise<boolean> {
  const row = await db.selectFrom("person").select("oneTimeEnrolledAt").where("id", "=", personId).executeTakeFirst();
  return row?.oneTimeEnrolledAt != null;
}
