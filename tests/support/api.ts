/** The API as a client meets it: the real route files, sessions and keys, over a test database. */
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { v7 as uuidv7 } from "uuid";
import { afterAll } from "vitest";
import { closeDb } from "@/db/client";
import type { Db } from "@/db/executor";
import { setEnv } from "@/lib/env";
import type { PersonCtx } from "@/lib/services/context";
import { type CallOptions, callRoute, type Method, type Reply } from "./call-route";
import { openTestDatabase } from "./database";
import { drainJobs } from "./jobs";
import { addPeople, type PersonName, type TestPeople } from "./people";

export type { CallOptions, Method, Reply } from "./call-route";

export interface TestApi {
  /** As the app connects. */
  db: Db;
  /** As the owner connects. */
  owner: Db;
  people: TestPeople;
  call(method: Method, path: string, options?: CallOptions): Promise<Reply>;
  /** A signed-in person's context, for calling services. */
  ctx(name: PersonName): PersonCtx;
  /** Does every waiting job. @returns how many */
  runJobs(): Promise<number>;
  close(): Promise<void>;
}

let open: TestApi | undefined;

// Before the database is dropped, which its own module does at the end of the file: the app's pool would lose its connections.
afterAll(async () => open?.close());

/** Opens a database with the people of {@link addPeople} and points the app at it. One at a time. */
export async function openTestApi(): Promise<TestApi> {
  const database = await openTestDatabase();
  const home = mkdtempSync(join(tmpdir(), "trimwright-test-"));
  await open?.close();
  setEnv({
    DATABASE_URL: database.appUrl,
    TRIMWRIGHT_HOME: home,
    TRIMWRIGHT_ORIGIN: "http://127.0.0.1:3000",
    NEXTAUTH_URL: "http://127.0.0.1:3000",
    NEXTAUTH_SECRET: "a secret for tests only, nothing is guarded by it",
  });
  const people = await addPeople(database.db);
  const api: TestApi = {
    db: database.db,
    owner: database.owner,
    people,
    call: (method, path, options = {}) => callRoute(people, method, path, options),
    ctx: (name) => ({
      db: database.db,
      actor: people[name],
      now: () => new Date(),
      newId: uuidv7,
      requestId: uuidv7(),
      address: "",
    }),
    runJobs: () => drainJobs(database.db),
    close: async () => {
      open = undefined;
      await closeDb();
      await database.close();
      rmSync(home, { recursive: true, force: true });
    },
  };
  open = api;
  return api;
}
