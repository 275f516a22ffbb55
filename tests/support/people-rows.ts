import { v7 as uuidv7 } from "uuid";
import type { Db } from "@/db/executor";
import type { Role } from "@/lib/domain/roles";

/** A person with roles, written by the owner past every service: for tests of what the database itself refuses. */
export async function insertPerson(owner: Db, name: string, ...roles: Role[]): Promise<string> {
  const id = uuidv7();
  const at = new Date();
  await owner
    .insertInto("person")
    .values({ id, email: `${name}@rows.example`, name, createdAt: at })
    .execute();
  const grants = roles.map((role) => ({ id: uuidv7(), personId: id, role, askedAt: at, confirmedAt: at }));
  if (grants.length > 0) await owner.insertInto("roleGrant").values(grants).execute();
  return id;
}
