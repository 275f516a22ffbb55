/** Brings a database to the newest shape, as its owner: tables, job queues, grants. */
import { Kysely, type MigrationResult, Migrator, PostgresDialect, sql } from "kysely";
import pg from "pg";
import PgBoss from "pg-boss";
import { closeDatabaseToPublic, closeSchemaToPublic } from "@/db/roles";
import { AppError } from "@/lib/errors";
import { QUEUES } from "@/lib/jobs/queues";
import { migrations } from "@/migrations/index";

/** Any fixed number; one migration at a time holds it, whoever starts it. */
const MIGRATION_LOCK = 7_246_001;
/** The queue that pg-boss uses for its own schedules; the app's role could not create it later. */
const SCHEDULE_QUEUE = "__pgboss__send-it";

export interface MigrateInput {
  /** Connection of the owner. */
  ownerUrl: string;
  /** Role that the app connects with; it must exist and gets the grants. */
  appRole: string;
}

/**
 * Migrates, sets up the job queues and grants the app's role its rights. Safe to repeat, and safe when two starts do it
 * at once: the second waits for the first.
 * @returns names of the migrations that ran now, oldest first.
 * @throws AppError `database.migration_failed` {migration}; a failed migration leaves nothing behind.
 */
export async function migrateDatabase(input: MigrateInput): Promise<string[]> {
  const owner = openOwner(input.ownerUrl, input.appRole);
  try {
    return await owner.connection().execute(async (session) => {
      await sql`select pg_advisory_lock(${MIGRATION_LOCK})`.execute(session);
      try {
        await closeDatabaseToPublic(session, databaseOf(input.ownerUrl), input.appRole);
        await closeSchemaToPublic(session, input.appRole);
        const applied = await runMigrations(owner);
        await setUpQueues(input.ownerUrl);
        await grantQueues(session, input.appRole);
        await grantMigrationNotes(session, input.appRole);
        return applied;
      } finally {
        await sql`select pg_advisory_unlock(${MIGRATION_LOCK})`.execute(session);
      }
    });
  } finally {
    await owner.destroy();
  }
}

/**
 * Names of migrations that the database has not seen yet, oldest first.
 * @param url connection of the app's role or the owner.
 */
export async function listPendingMigrations(url: string): Promise<string[]> {
  const owner = openOwner(url, "");
  try {
    const known = await migratorOf(owner).getMigrations();
    return known.filter((migration) => migration.executedAt === undefined).map((migration) => migration.name);
  } finally {
    await owner.destroy();
  }
}

/** A connection for SQL that names things as they are: no renaming plugin, no time limit. */
export function openOwner(ownerUrl: string, appRole: string): Kysely<never> {
  const pool = new pg.Pool({
    connectionString: ownerUrl,
    application_name: "trimwright-owner",
    max: 2,
    connectionTimeoutMillis: 10_000,
    options: `-c timezone=UTC -c trimwright.app_role=${appRole.replaceAll("\\", "\\\\").replaceAll(" ", "\\ ")}`,
  });
  pool.on("error", (error) => console.error(`database connection lost: ${error.message}`));
  return new Kysely<never>({ dialect: new PostgresDialect({ pool }) });
}

function databaseOf(url: string): string {
  const parsed = new URL(url);
  return decodeURIComponent(parsed.pathname.slice(1)) || decodeURIComponent(parsed.username);
}

function migratorOf(owner: Kysely<never>): Migrator {
  return new Migrator({ db: owner, provider: { getMigrations: async () => migrations } });
}

async function runMigrations(owner: Kysely<never>): Promise<string[]> {
  const { error, results } = await migratorOf(owner).migrateToLatest();
  const failed = results?.find((result: MigrationResult) => result.status === "Error");
  if (error !== undefined) {
    const reason = error instanceof Error ? error.message : String(error);
    throw new AppError(
      "database.migration_failed",
      {
        migration: failed?.migrationName ?? null,
        message: `Migration ${failed?.migrationName ?? ""} failed: ${reason}`,
      },
      { cause: error },
    );
  }
  return (results ?? []).map((result) => result.migrationName);
}

async function setUpQueues(ownerUrl: string): Promise<void> {
  const boss = new PgBoss({
    connectionString: ownerUrl,
    schema: "pgboss",
    max: 1,
    migrate: true,
    supervise: false,
    schedule: false,
  });
  boss.on("error", (error) => console.error(`job queues: ${error.message}`));
  await boss.start();
  try {
    const present = new Set((await boss.getQueues()).map((queue) => queue.name));
    for (const name of [...QUEUES, SCHEDULE_QUEUE]) if (!present.has(name)) await boss.createQueue(name);
  } finally {
    await boss.stop({ graceful: false });
  }
}

/** A start without the owner's address can then say what was not migrated yet. */
async function grantMigrationNotes(owner: Kysely<never>, appRole: string): Promise<void> {
  await sql`grant select on table kysely_migration, kysely_migration_lock to ${sql.id(appRole)}`.execute(owner);
}

async function grantQueues(owner: Kysely<never>, appRole: string): Promise<void> {
  const role = sql.id(appRole);
  await sql`grant usage on schema pgboss to ${role}`.execute(owner);
  await sql`grant select, insert, update, delete on all tables in schema pgboss to ${role}`.execute(owner);
  await sql`grant execute on all functions in schema pgboss to ${role}`.execute(owner);
  await sql`alter default privileges in schema pgboss grant select, insert, update, delete on tables to ${role}`.execute(
    owner,
  );
}
