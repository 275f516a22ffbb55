import { sql } from "kysely";
import { afterAll, describe, expect, inject, it } from "vitest";
import { createDatabase, credentialsOf, dropDatabase, onServer, withDatabase } from "@/db/databases";
import { openOwner } from "@/db/migrate";
import { ensureAppRole } from "@/db/roles";
import { beginStart, healthOf, makeHome, openStart, processesOf } from "../support/running-start";

const server = inject("testServerUrl");
const PASSWORD = "only for tests";
const DATABASE = `other_server_${process.pid}`;
const APP = `weak_${process.pid}`;
const OWNING = `owning_${process.pid}`;

const ownerUrl = withDatabase(server, DATABASE);
const urlOf = (name: string, password = PASSWORD) => withDatabase(server, DATABASE, { name, password });

afterAll(() =>
  onServer(server, async (owner) => {
    await dropDatabase(owner, DATABASE);
    for (const role of [APP, OWNING]) await sql`drop role if exists ${sql.id(role)}`.execute(owner);
  }),
);

async function runAsOwner(...statements: string[]): Promise<void> {
  const owner = openOwner(ownerUrl, "");
  try {
    for (const statement of statements) await sql.raw(statement).execute(owner);
  } finally {
    await owner.destroy();
  }
}

/** Starts with the addresses given and expects one line of refusal. */
async function refusalOf(databaseUrl: string, owner?: string): Promise<string> {
  const home = makeHome();
  const env = { DATABASE_URL: databaseUrl, ...(owner === undefined ? {} : { TRIMWRIGHT_OWNER_URL: owner }) };
  const start = await beginStart({ home, env });
  expect(await start.ended()).toBe(1);
  expect(processesOf(home)).toEqual([]);
  const lines = start
    .output()
    .trimEnd()
    .split("\n")
    .filter((line) => !/^(Migrated|Stopped)/.test(line));
  expect(lines).toHaveLength(1);
  return lines[0] ?? "";
}

describe("a start with a database server of somebody else's", () => {
  it("says what is missing where nobody migrated", async () => {
    await onServer(server, async (owner) => {
      await createDatabase(owner, DATABASE);
      for (const role of [APP, OWNING]) await ensureAppRole(owner, role, PASSWORD);
    });
    expect(await refusalOf(urlOf(APP))).toMatch(
      /^trimwright: The database lacks \d+ migrations; set TRIMWRIGHT_OWNER_URL so that this start can run them$/,
    );
  });

  it("migrates as the owner, serves as the app's role, makes no server and seeds nothing", async () => {
    const home = makeHome();
    const env = { DATABASE_URL: urlOf(APP), TRIMWRIGHT_OWNER_URL: ownerUrl, TRIMWRIGHT_DEMO: "1" };
    const start = await openStart({ home, env });
    expect(start.output()).toMatch(/^Migrated the database \(\d+ steps\)\.$/m);
    expect(start.output()).not.toMatch(/Starting the database|demo/);
    expect(start.output()).toMatch(/The first admin chooses a password here, once:/);
    expect(await healthOf(start)).toMatchObject({ status: 200, body: { status: "ok" } });
    start.kill("SIGINT");
    expect(await start.ended()).toBe(0);
    expect(processesOf(home)).toEqual([]);
  });

  it("needs the owner for migrations only", async () => {
    const start = await openStart({ home: makeHome(), env: { DATABASE_URL: urlOf(APP) } });
    expect(start.output()).not.toContain("Migrated");
    start.kill("SIGINT");
    expect(await start.ended()).toBe(0);
  });

  it("refuses a superuser as the app's role", async () => {
    expect(await refusalOf(ownerUrl, ownerUrl)).toMatch(
      new RegExp(
        `^trimwright: The app's database role "${credentialsOf(ownerUrl).name}" is a superuser and owns tables and .+; give DATABASE_URL a role with fewer rights$`,
      ),
    );
  });

  it("refuses a role that owns a table", async () => {
    await runAsOwner(`alter table mail owner to ${OWNING}`, `grant connect on database ${DATABASE} to ${OWNING}`);
    expect(await refusalOf(urlOf(OWNING))).toBe(
      `trimwright: The app's database role "${OWNING}" owns tables; give DATABASE_URL a role with fewer rights`,
    );
    await runAsOwner(`alter table mail owner to ${credentialsOf(ownerUrl).name}`, `drop owned by ${OWNING}`);
  });

  it("names a wrong password, a database that is not there and a server that does not answer", async () => {
    expect(await refusalOf(urlOf(APP, "wrong"))).toBe("trimwright: The database refused the password");
    const missing = withDatabase(server, "nowhere", { name: APP, password: PASSWORD });
    expect(await refusalOf(missing)).toBe('trimwright: The database is not there: database "nowhere" does not exist');
    expect(await refusalOf("postgresql://a:b@127.0.0.1:1/x")).toBe(
      "trimwright: The database does not answer: connection refused",
    );
  });
});
