import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { holdsRole, type NewGrant } from "@/db/queries/role-grants";
import type { Role } from "@/lib/domain/roles";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertPerson } from "../support/people-rows";

let database: TestDatabase;
let admin: string;
let admin2: string;
let engineer: string;
const at = new Date();

beforeAll(async () => {
  database = await openTestDatabase();
  admin = await insertPerson(database.owner, "admin", "admin");
  admin2 = await insertPerson(database.owner, "admin2", "admin");
  engineer = await insertPerson(database.owner, "engineer", "engineer");
});

let count = 0;
const newcomer = () => {
  count += 1;
  return insertPerson(database.owner, `newcomer${count}`);
};

/** A grant as the app's role writes it. @returns its id */
async function grant(personId: string, role: Role, more: Partial<NewGrant> = {}): Promise<string> {
  const id = uuidv7();
  const asked = { id, personId, role, askedBy: admin, askedAt: at, confirmedBy: null, confirmedAt: null };
  await database.db
    .insertInto("roleGrant")
    .values({ ...asked, ...more })
    .execute();
  return id;
}
const confirm = (id: string, confirmedBy: string | null) =>
  database.db.updateTable("roleGrant").set({ confirmedBy, confirmedAt: at }).where("id", "=", id).execute();

describe("a role in the database", () => {
  it.each<Role>(["reviewer", "admin"])("%s is not confirmed by who asked for it, nor by nobody", async (role) => {
    const person = await newcomer();
    const id = await grant(person, role);
    await expect(confirm(id, admin)).rejects.toMatchObject({ constraint: "role_grant_second_admin" });
    await expect(confirm(id, null)).rejects.toMatchObject({ constraint: "role_grant_second_admin" });
    await expect(grant(await newcomer(), role, { confirmedBy: admin, confirmedAt: at })).rejects.toMatchObject({
      constraint: "role_grant_second_admin",
    });
    expect(await holdsRole(database.db, person, role)).toBe(false);
    await confirm(id, admin2);
    expect(await holdsRole(database.db, person, role)).toBe(true);
  });

  it("is nobody's to ask or confirm for themselves", async () => {
    await expect(grant(admin, "reviewer")).rejects.toMatchObject({ constraint: "role_grant_not_own" });
    const id = await grant(admin2, "reviewer");
    await expect(confirm(id, admin2)).rejects.toMatchObject({ constraint: "role_grant_not_own" });
  });

  it("is asked for and confirmed by admins only", async () => {
    const person = await newcomer();
    await expect(grant(person, "service", { askedBy: engineer })).rejects.toMatchObject({ message: "auth.forbidden" });
    const id = await grant(person, "reviewer");
    await expect(confirm(id, engineer)).rejects.toMatchObject({ code: "TW001", message: "auth.forbidden" });
    const gone = await insertPerson(database.owner, "gone", "admin");
    await database.owner.updateTable("person").set({ active: false }).where("id", "=", gone).execute();
    await expect(confirm(id, gone)).rejects.toMatchObject({ message: "auth.forbidden" });
  });

  it("is held or asked for once at a time, and of the six that there are", async () => {
    const person = await newcomer();
    await grant(person, "reviewer");
    await expect(grant(person, "reviewer")).rejects.toMatchObject({ constraint: "role_grant_open" });
    await expect(grant(person, "chief" as Role)).rejects.toMatchObject({ constraint: "role_grant_role" });
  });

  it("stays as asked and decided; ended, it does not come back", async () => {
    const person = await newcomer();
    const id = await grant(person, "reviewer");
    const set = (values: object) => database.db.updateTable("roleGrant").set(values).where("id", "=", id).execute();
    for (const forged of [{ askedBy: null }, { role: "admin" }, { personId: engineer }, { askedAt: new Date(0) }])
      await expect(set(forged)).rejects.toMatchObject({ message: "role.wrong_state" });
    await confirm(id, admin2);
    await expect(set({ confirmedAt: null, confirmedBy: null })).rejects.toMatchObject({ message: "role.wrong_state" });
    await set({ endedAt: at, endedBy: admin });
    expect(await holdsRole(database.db, person, "reviewer")).toBe(false);
    await expect(set({ endedAt: null, endedBy: null })).rejects.toMatchObject({ message: "role.wrong_state" });
    await expect(database.db.deleteFrom("roleGrant").where("id", "=", id).execute()).rejects.toMatchObject({
      code: "42501",
    });
  });

  it("counts for nothing while its holder is inactive", async () => {
    const person = await insertPerson(database.owner, "away", "reviewer");
    expect(await holdsRole(database.db, person, "reviewer")).toBe(true);
    await database.db.updateTable("person").set({ active: false }).where("id", "=", person).execute();
    expect(await holdsRole(database.db, person, "reviewer")).toBe(false);
  });
});

describe("a person in the database", () => {
  const insert = (email: string, name = "Anybody") =>
    database.db.insertInto("person").values({ id: uuidv7(), email, name, createdAt: at }).execute();

  it("has a lower-case address that is theirs alone, and a name", async () => {
    await expect(insert("Upper@rows.example")).rejects.toMatchObject({ constraint: "person_email_lower" });
    await expect(insert("admin@rows.example")).rejects.toMatchObject({ constraint: "person_email_unique" });
    await expect(insert("nameless@rows.example", "")).rejects.toMatchObject({ constraint: "person_name_length" });
  });

  it("stays: the app can't delete people, nor their keys", async () => {
    await expect(database.db.deleteFrom("person").execute()).rejects.toMatchObject({ code: "42501" });
    await expect(database.db.deleteFrom("accessKey").execute()).rejects.toMatchObject({ code: "42501" });
  });

  it("gets links of the two kinds that there are", async () => {
    const link = { tokenHash: Buffer.alloc(32), personId: engineer, purpose: "other", createdAt: at, expiresAt: at };
    await expect(database.db.insertInto("passwordLink").values(link).execute()).rejects.toMatchObject({
      constraint: "password_link_purpose",
    });
  });
});
