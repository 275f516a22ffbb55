/** The database of a start: our own server in the home, or the one that the environment names. */
import { type Kysely, sql } from "kysely";
import { v7 } from "uuid";
import { closeDb, openDb } from "@/db/client";
import {
  createDatabase,
  credentialsOf,
  dropDatabase,
  findDatabaseNote,
  isDatabaseThere,
  noteOnDatabase,
  onServer,
  renameDatabase,
} from "@/db/databases";
import type { Db } from "@/db/executor";
import { findLocalUrl, type LocalServer, startLocalServer } from "@/db/local-server";
import { listPendingMigrations, migrateDatabase } from "@/db/migrate";
import { findRunningServer } from "@/db/pid-file";
import { APP_ROLE, assertAppRoleIsWeak, ensureAppRole } from "@/db/roles";
import { ensurePostgres } from "@/lib/commands/ensure-postgres";
import { databasePassword, type Env, setEnv } from "@/lib/env";
import { AppError } from "@/lib/errors";

const DATABASE = "trimwright";
/** Its name until it is migrated and seeded; whatever has this name at a start was cut short and is made anew. */
const UNFINISHED = "trimwright_setup";
const DEMO_NOTE = "Trimwright, demo data";
const EMPTY_NOTE = "Trimwright";

export interface StartDatabase {
  /** Connection of the app's role. */
  appUrl: string;
  /** Whether the demo's accounts are in it. */
  demo: boolean;
  /** Starts our own server again if it is gone; nothing for a server of someone else's. */
  revive(): Promise<boolean>;
  stop(): Promise<void>;
}

/** Connection of the app's role to the database of the `npm start` that runs with this home; undefined where none runs. */
export function findStartedDatabase(home: string): Promise<string | undefined> {
  return findLocalUrl(home, DATABASE, APP_ROLE);
}

export interface StartDatabaseOptions {
  settings: Env;
  signal: AbortSignal;
  say: (line: string) => void;
}

/**
 * A database that is migrated and safe to serve from.
 * @throws AppError `database.not_migrated`, `database.role_too_powerful`, and those of the steps.
 */
export async function openStartDatabase(options: StartDatabaseOptions): Promise<StartDatabase> {
  const { databaseUrl } = options.settings;
  const database = databaseUrl === undefined ? await openOwn(options) : await openGiven(databaseUrl, options);
  try {
    await withApp(database.appUrl, assertAppRoleIsWeak);
    return database;
  } catch (error) {
    await database.stop();
    throw error;
  }
}

async function openGiven(appUrl: string, { settings, say }: StartDatabaseOptions): Promise<StartDatabase> {
  if (settings.ownerUrl !== undefined) {
    const applied = await migrateDatabase({ ownerUrl: settings.ownerUrl, appRole: credentialsOf(appUrl).name });
    if (applied.length > 0) say(`Migrated the database (${applied.length} steps).`);
  } else {
    await withApp(appUrl, assertAppRoleIsWeak); // before its rights are needed to read what was migrated
    const pending = await listPendingMigrations(appUrl);
    if (pending.length > 0) {
      throw new AppError("database.not_migrated", {
        pending,
        message: `The database lacks ${pending.length} migrations; set TRIMWRIGHT_OWNER_URL so that this start can run them`,
      });
    }
  }
  return { appUrl, demo: false, revive: async () => false, stop: async () => undefined };
}

async function openOwn(options: StartDatabaseOptions): Promise<StartDatabase> {
  const { settings, signal, say } = options;
  await ensurePostgres({ home: settings.home, signal, say });
  say("Starting the database …");
  const serverOptions = { home: settings.home, fsync: true };
  let server = await startLocalServer(serverOptions);
  try {
    const demo = await onServer(server.urlOf("postgres"), (owner) => bringUp(owner, server, options));
    return {
      appUrl: server.urlOf(DATABASE, APP_ROLE),
      demo,
      revive: async () => {
        if (findRunningServer(server.dataDir) !== undefined) return false;
        // At the same address, which the running app and worker have.
        server = await startLocalServer({ ...serverOptions, port: server.port });
        return true;
      },
      stop: () => server.stop(),
    };
  } catch (error) {
    await server.stop();
    throw error;
  }
}

/** @returns whether the database holds demo data. */
async function bringUp(owner: Kysely<never>, server: LocalServer, options: StartDatabaseOptions): Promise<boolean> {
  await ensureAppRole(owner, APP_ROLE, databasePassword(APP_ROLE, options.settings.home));
  if (!(await isDatabaseThere(owner, DATABASE))) {
    await makeDatabase(owner, server, options);
  } else {
    const applied = await migrateDatabase({ ownerUrl: server.urlOf(DATABASE), appRole: APP_ROLE });
    if (applied.length > 0) options.say(`Migrated the database (${applied.length} steps).`);
  }
  return (await findDatabaseNote(owner, DATABASE)) === DEMO_NOTE;
}

/** Makes the database under another name and renames it when it is whole, so that an interrupted start leaves no half. */
async function makeDatabase(owner: Kysely<never>, server: LocalServer, options: StartDatabaseOptions): Promise<void> {
  const { settings, signal, say } = options;
  await dropDatabase(owner, UNFINISHED);
  await createDatabase(owner, UNFINISHED);
  say("Making tables …");
  await migrateDatabase({ ownerUrl: server.urlOf(UNFINISHED), appRole: APP_ROLE });
  if (settings.demo) {
    say("Filling in the demo …");
    const appUrl = server.urlOf(UNFINISHED, APP_ROLE);
    setEnv({ DATABASE_URL: appUrl });
    const { seedDemo } = await import("@/lib/demo/seed");
    await withApp(appUrl, (db) => {
      signal.addEventListener("abort", () => void db.destroy(), { once: true }); // its next step then fails
      return seedDemo(db, say);
    });
    await closeDb();
  }
  signal.throwIfAborted();
  await noteOnDatabase(owner, UNFINISHED, settings.demo ? DEMO_NOTE : EMPTY_NOTE);
  await renameDatabase(owner, UNFINISHED, DATABASE);
}

async function withApp<T>(appUrl: string, work: (db: Db) => Promise<T>): Promise<T> {
  const db = openDb(appUrl, { applicationName: "trimwright-start", statementTimeoutMs: 300_000 });
  try {
    return await work(db);
  } finally {
    await db.destroy();
  }
}

/** The demo's people with their roles, for the lines that say who can sign in. */
export async function listDemoAccounts(appUrl: string): Promise<{ email: string; roles: string }[]> {
  return withApp(appUrl, async (db) => {
    const { rows } = await sql<{ email: string; roles: string }>`
      select p.email, coalesce(string_agg(g.role, ', ' order by g.role), 'no role') as roles
      from person p left join role_grant g on g.person_id = p.id and g.confirmed_at is not null and g.ended_at is null
      where p.active and p.email like '%@marram.example' group by p.email order by min(p.created_at), p.email
    `.execute(db);
    return rows;
  });
}

/** A link with which the first admin chooses a password; undefined once somebody has the role. */
export async function findFirstAdminLink(appUrl: string): Promise<string | undefined> {
  const { inviteFirstAdmin } = await import("@/lib/services/people/invite-first-admin");
  return withApp(appUrl, async (db) => {
    const ctx = {
      db,
      actor: { kind: "system" as const },
      now: () => new Date(),
      newId: v7,
      requestId: v7(),
      address: "",
    };
    return (await inviteFirstAdmin(ctx))?.url;
  });
}
