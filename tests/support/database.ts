/** A database of its own for a test file, dropped at the end unless a test failed; then its name is printed. */
import { afterAll, afterEach, inject } from "vitest";
import { openDb } from "@/db/client";
import type { Db } from "@/db/executor";
import { createTestDatabase, dropTestDatabase } from "@/db/test-database";

export interface TestDatabase {
  /** As the app connects: DML and execute only. */
  db: Db;
  /** As the owner: for arranging what the app may not do, and for looking past its grants. */
  owner: Db;
  name: string;
  /** Connection strings, for code under test that connects by itself. */
  appUrl: string;
  ownerUrl: string;
  /** Closes and drops; called at the end of the file for every database still open. */
  close(): Promise<void>;
}

const open = new Set<TestDatabase>();
let failed = false;

// Registered where this module is imported: once per test file, before its tests.
afterEach(({ task }) => {
  if (task.result?.state === "fail") failed = true;
});
afterAll(async () => {
  for (const database of open) await database.close();
});

/** A fresh, migrated, empty database. Call it in `beforeAll`, or once per test where tests must not share. */
export async function openTestDatabase(): Promise<TestDatabase> {
  const serverUrl = inject("testServerUrl");
  const { name, appUrl, ownerUrl } = await createTestDatabase(serverUrl, inject("testTemplate"));
  const db = openDb(appUrl, { applicationName: name, maxConnections: 10 });
  const owner = openDb(ownerUrl, { applicationName: name, maxConnections: 4 });
  const database: TestDatabase = {
    db,
    owner,
    name,
    appUrl,
    ownerUrl,
    close: async () => {
      if (!open.delete(database)) return;
      await closeAll(db, owner);
      if (failed) console.error(`kept for a look after the failure: database ${name}`);
      else await dropTestDatabase(serverUrl, name);
    },
  };
  open.add(database);
  return database;
}

async function closeAll(...pools: Db[]): Promise<void> {
  for (const pool of pools) await pool.destroy();
}
