/**
 * Databases for tests. One template is migrated for each state of the migrations; a test file's database is a copy of it,
 * made in some ten milliseconds.
 */
import { createHash } from "node:crypto";
import { readdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { type Kysely, sql } from "kysely";
import {
  createDatabase,
  credentialsOf,
  dropDatabase,
  isDatabaseThere,
  onServer,
  renameDatabase,
  withDatabase,
} from "@/db/databases";
import { migrateDatabase } from "@/db/migrate";
import { APP_ROLE, closeDatabaseToPublic, ensureAppRole } from "@/db/roles";

const TEMPLATE_LOCK = 7_246_002;
const TEMPLATES_KEPT = 3;
const LEFTOVER_AFTER_HOURS = 24;
const TEMPLATE_PREFIX = "template_";
const COPY_PREFIX = "test_";

/** What decides how a migrated database looks. */
const SHAPING_FILES = ["db/migrate.ts", "db/roles.ts", "lib/jobs/queues.ts"];

/**
 * Makes the template for the checkout's migrations unless the server has it. Processes that come at once wait for the first.
 * @param serverUrl connection of the server's superuser.
 * @returns the template's name.
 */
export async function ensureTemplate(serverUrl: string, checkout: string): Promise<string> {
  const name = `${TEMPLATE_PREFIX}${shapeHash(checkout)}`;
  await onServer(serverUrl, (pool) =>
    pool.connection().execute(async (owner) => {
      await sql`select pg_advisory_lock(${TEMPLATE_LOCK})`.execute(owner);
      try {
        await ensureAppRole(owner, APP_ROLE, credentialsOf(serverUrl).password);
        if (await isDatabaseThere(owner, name)) return;
        const unfinished = `${name}_unfinished`;
        await dropDatabase(owner, unfinished);
        await createDatabase(owner, unfinished);
        await migrateDatabase({ ownerUrl: withDatabase(serverUrl, unfinished), appRole: APP_ROLE });
        await renameDatabase(owner, unfinished, name);
        await dropOldTemplates(owner);
        await dropLeftovers(owner);
      } finally {
        await sql`select pg_advisory_unlock(${TEMPLATE_LOCK})`.execute(owner);
      }
    }),
  );
  return name;
}

export interface TestDatabaseUrls {
  name: string;
  /** Connection of the superuser. */
  ownerUrl: string;
  /** Connection of the app's role. */
  appUrl: string;
}

/** A fresh copy of the template. Its name carries the time, by which leftovers of failed files are found and dropped a day later. */
export async function createTestDatabase(serverUrl: string, template: string): Promise<TestDatabaseUrls> {
  const stamp = new Date().toISOString().replace(/\D/g, "").slice(0, 14);
  const name = `${COPY_PREFIX}${stamp}_${process.pid}_${Math.random().toString(36).slice(2, 8)}`;
  await onServer(serverUrl, async (owner) => {
    await createDatabase(owner, name, template);
    await closeDatabaseToPublic(owner, name, APP_ROLE);
  });
  const app = { name: APP_ROLE, password: credentialsOf(serverUrl).password };
  return { name, ownerUrl: withDatabase(serverUrl, name), appUrl: withDatabase(serverUrl, name, app) };
}

/** Drops a test's database with whatever sessions it left open. */
export async function dropTestDatabase(serverUrl: string, name: string): Promise<void> {
  await onServer(serverUrl, (owner) => dropDatabase(owner, name));
}

function shapeHash(checkout: string): string {
  const migrations = readdirSync(join(checkout, "migrations")).sort();
  const hash = createHash("sha256");
  for (const file of [...SHAPING_FILES, ...migrations.map((name) => join("migrations", name))]) {
    hash
      .update(`${file}\0`)
      .update(readFileSync(join(checkout, file)))
      .update("\0");
  }
  return hash.digest("hex").slice(0, 16);
}

/** Older templates may still serve a run that began before the migrations changed, so a few stay. */
async function dropOldTemplates(owner: Kysely<never>): Promise<void> {
  const { rows } = await sql<{ name: string }>`
    select datname as name from pg_database where datname like ${`${TEMPLATE_PREFIX}%`}
      and datname not in ('template0', 'template1') order by oid desc offset ${TEMPLATES_KEPT}
  `.execute(owner);
  for (const { name } of rows) await dropDatabase(owner, name);
}

async function dropLeftovers(owner: Kysely<never>): Promise<void> {
  const { rows } = await sql<{ name: string }>`
    select datname as name from pg_database where datname like ${`${COPY_PREFIX}%`}
      and to_timestamp(substring(datname from 6 for 14), 'YYYYMMDDHH24MISS') < now() - make_interval(hours => ${LEFTOVER_AFTER_HOURS})
      and not exists (select from pg_stat_activity a where a.datname = pg_database.datname)
  `.execute(owner);
  for (const { name } of rows) await dropDatabase(owner, name);
}
