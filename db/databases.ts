/** Whole databases on a server: made, renamed, dropped by the owner. Every function opens and closes its own connection. */
import { type Kysely, sql } from "kysely";
import { openOwner } from "@/db/migrate";

/** The same connection string for another database, and for another role if one is named. */
export function withDatabase(url: string, database: string, role?: { name: string; password: string }): string {
  const changed = new URL(url);
  changed.pathname = `/${encodeURIComponent(database)}`;
  if (role !== undefined) {
    changed.username = encodeURIComponent(role.name);
    changed.password = encodeURIComponent(role.password);
  }
  return changed.href;
}

/** The role and password that a connection string names. */
export function credentialsOf(url: string): { name: string; password: string } {
  const parsed = new URL(url);
  return { name: decodeURIComponent(parsed.username), password: decodeURIComponent(parsed.password) };
}

/** Runs work on the server's maintenance database as its owner. */
export async function onServer<T>(serverUrl: string, work: (owner: Kysely<never>) => Promise<T>): Promise<T> {
  const owner = openOwner(withDatabase(serverUrl, "postgres"), "");
  try {
    return await work(owner);
  } finally {
    await owner.destroy();
  }
}

export async function isDatabaseThere(owner: Kysely<never>, name: string): Promise<boolean> {
  const { rows } = await sql`select 1 from pg_database where datname = ${name}`.execute(owner);
  return rows.length > 0;
}

/** @param template copied as it is; nobody may be connected to it. Without one the database is empty. */
export async function createDatabase(owner: Kysely<never>, name: string, template = "template0"): Promise<void> {
  await sql`create database ${sql.id(name)} template ${sql.id(template)}`.execute(owner);
}

/** Drops the database if it is there, ending the sessions on it. */
export async function dropDatabase(owner: Kysely<never>, name: string): Promise<void> {
  await sql`drop database if exists ${sql.id(name)} with (force)`.execute(owner);
}

export async function renameDatabase(owner: Kysely<never>, from: string, to: string): Promise<void> {
  await sql`alter database ${sql.id(from)} rename to ${sql.id(to)}`.execute(owner);
}

/** Notes on the database what it holds; read back by {@link findDatabaseNote}. */
export async function noteOnDatabase(owner: Kysely<never>, name: string, note: string): Promise<void> {
  await sql`comment on database ${sql.id(name)} is ${sql.lit(note)}`.execute(owner);
}

export async function findDatabaseNote(owner: Kysely<never>, name: string): Promise<string | undefined> {
  const { rows } = await sql<{ note: string | null }>`
    select shobj_description(oid, 'pg_database') as note from pg_database where datname = ${name}
  `.execute(owner);
  return rows[0]?.note ?? undefined;
}
