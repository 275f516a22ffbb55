/** Connections to PostgreSQL. Made at the first query, so that importing this needs no database. */
import { CamelCasePlugin, Kysely, PostgresDialect } from "kysely";
import pg from "pg";
import type { Db } from "@/db/executor";
import type { DB } from "@/db/generated/types.generated";
import { env } from "@/lib/env";
import { AppError } from "@/lib/errors";

const DATE_OID = 1082;

export interface ConnectionOptions {
  /** Shown in pg_stat_activity. */
  applicationName: string;
  maxConnections?: number;
  /** Longest statement in milliseconds; 0 for none. */
  statementTimeoutMs?: number;
  /** Longest wait for a connection, new or given back, in milliseconds. */
  connectTimeoutMs?: number;
}

/**
 * A pool for one connection string. bigint and numeric come as strings, timestamptz as Date, date as `YYYY-MM-DD`
 * (a Date would move it by the time zone), bytea as Buffer.
 */
export function openPool(url: string, options: ConnectionOptions): pg.Pool {
  const statementTimeoutMs = options.statementTimeoutMs ?? 30_000;
  const pool = new pg.Pool({
    connectionString: url,
    application_name: options.applicationName,
    max: options.maxConnections ?? 10,
    connectionTimeoutMillis: options.connectTimeoutMs ?? 10_000,
    statement_timeout: statementTimeoutMs,
    idle_in_transaction_session_timeout: 60_000,
    options: "-c timezone=UTC",
    types: {
      getTypeParser: (oid: number, format?: "text" | "binary") =>
        oid === DATE_OID ? (value: string) => value : pg.types.getTypeParser(oid, format),
    } as pg.CustomTypesConfig,
  });
  // Without a listener a lost idle connection would end the process; the next query finds out and reports it.
  pool.on("error", (error) => console.error(`database connection lost: ${error.message}`));
  return pool;
}

/** Typed queries over a pool of its own; `destroy()` closes it. Keys inside jsonb stay as they are. */
export function openDb(url: string, options: ConnectionOptions): Db {
  return new Kysely<DB>({
    dialect: new PostgresDialect({ pool: async () => openPool(url, options) }),
    plugins: [new CamelCasePlugin({ maintainNestedObjectKeys: true })],
  });
}

// Next bundles a module more than once in a process; the pool must be one all the same.
const shared = globalThis as typeof globalThis & { trimwrightDb?: Db };

/**
 * The process's database under the app's role (`DATABASE_URL`).
 * @throws AppError `database.unavailable` when no address is set.
 */
export function getDb(): Db {
  if (shared.trimwrightDb === undefined) {
    const url = env().databaseUrl;
    if (url === undefined) throw new AppError("database.unavailable", { message: "DATABASE_URL is not set" });
    shared.trimwrightDb = openDb(url, { applicationName: "trimwright" });
  }
  return shared.trimwrightDb;
}

/** Closes the process's pool, if one was made. */
export async function closeDb(): Promise<void> {
  const db = shared.trimwrightDb;
  shared.trimwrightDb = undefined;
  await db?.destroy();
}
