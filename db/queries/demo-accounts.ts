import { sql } from "kysely";
import type { Db } from "@/db/executor";
import { heldRoles } from "@/db/queries/people";
import type { Role } from "@/lib/domain/roles";

export interface DemoAccount {
  email: string;
  name: string;
  roles: Role[];
}

/** Active people of an e-mail domain that no person added, with what they may do, the first added first. */
export function listAccountsOfDomain(db: Db, domain: string): Promise<DemoAccount[]> {
  return db
    .selectFrom("person")
    .select(["email", "name", heldRoles.as("roles")])
    .where("active", "=", true)
    .where("createdBy", "is", null)
    .where(sql<string>`split_part(email, '@', 2)`, "=", domain)
    .orderBy("createdAt")
    .orderBy("id")
    .limit(20)
    .execute();
}
