import { sql } from "kysely";
import { beforeAll, describe, expect, it } from "vitest";
import { assertAppRoleIsWeak } from "@/db/roles";
import { openTestDatabase, type TestDatabase } from "../support/database";

let database: TestDatabase;
beforeAll(async () => {
  database = await openTestDatabase();
});

describe("the app's role", () => {
  it("is weak enough to start with", async () => {
    await expect(assertAppRoleIsWeak(database.db)).resolves.toBeUndefined();
  });

  it("is refused when it is the owner", async () => {
    await expect(assertAppRoleIsWeak(database.owner)).rejects.toMatchObject({
      code: "database.role_too_powerful",
      details: { powers: ["is a superuser", "owns tables", "may create objects in the schema public"] },
    });
  });

  it.each([
    ["a table", sql`create table mine (a int)`],
    ["a temporary table", sql`create temporary table mine (a int)`],
    ["a schema", sql`create schema mine`],
    ["a role", sql`create role mine`],
    ["a job queue", sql`select pgboss.create_queue('mine', '{}')`],
  ])("may not make %s", async (_name, statement) => {
    await expect(statement.execute(database.db)).rejects.toMatchObject({ code: "42501" });
  });
});
