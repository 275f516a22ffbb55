/** A database of its own on the tests' server, with people and the API over it, for a bench. */
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { v7 as uuidv7 } from "uuid";
import { closeDb, openDb } from "@/db/client";
import type { Db } from "@/db/executor";
import { createTestDatabase, dropTestDatabase, ensureTemplate } from "@/db/test-database";
import { CHECKOUT } from "@/lib/commands/checkout";
import { joinTestServer } from "@/lib/commands/test-server";
import { setEnv } from "@/lib/env";
import type { PersonCtx } from "@/lib/services/context";
import { type CallOptions, callRoute, type Method, type Reply } from "../support/call-route";
import { addPeople, type PersonName } from "../support/people";

export interface BenchApi {
  db: Db;
  call(method: Method, path: string, options?: CallOptions): Promise<Reply>;
  ctx(name: PersonName): PersonCtx;
}

/** Runs work over a fresh database and drops it afterwards, whatever happened. The server does not wait for the disk (fsync off). */
export async function withBenchApi<T>(work: (api: BenchApi) => Promise<T>): Promise<T> {
  const server = await joinTestServer();
  const home = mkdtempSync(join(tmpdir(), "trimwright-bench-"));
  try {
    const { name, appUrl } = await createTestDatabase(server.url, await ensureTemplate(server.url, CHECKOUT));
    const db = openDb(appUrl, { applicationName: name, maxConnections: 4 });
    const origin = "http://127.0.0.1:3000";
    const secret = "a secret for benches only, nothing is guarded by it";
    setEnv({ DATABASE_URL: appUrl, TRIMWRIGHT_HOME: home, TRIMWRIGHT_ORIGIN: origin, NEXTAUTH_SECRET: secret });
    try {
      const people = await addPeople(db);
      const rest = { now: () => new Date(), newId: uuidv7, requestId: uuidv7(), address: "" };
      return await work({
        db,
        call: (method, path, options = {}) => callRoute(people, method, path, options),
        ctx: (person) => ({ db, actor: people[person], ...rest }),
      });
    } finally {
      await closeDb();
      await db.destroy();
      await dropTestDatabase(server.url, name);
    }
  } finally {
    rmSync(home, { recursive: true, force: true });
    await server.release();
  }
}
