/** The two roles: an owner that makes tables, and the app's role that only uses them. */
import { type Kysely, sql } from "kysely";
import { AppError } from "@/lib/errors";

export const OWNER_ROLE = "trimwright_owner";
export const APP_ROLE = "trimwright_app";

/**
 * Makes the app's role, or brings it back to what it may be: log in, nothing more.
 * @param owner a connection that may create roles.
 */
export async function ensureAppRole(owner: Kysely<never>, role: string, password: string): Promise<void> {
  const known = await sql`select 1 from pg_roles where rolname = ${role}`.execute(owner);
  const verb = known.rows.length > 0 ? sql`alter` : sql`create`;
  await sql`${verb} role ${sql.id(role)} login nosuperuser nocreatedb nocreaterole nobypassrls noreplication
            password ${sql.lit(password)}`.execute(owner);
}

/** Takes from everybody what only the owner needs: new objects in the schema `public` of the connected database. */
export async function closeSchemaToPublic(owner: Kysely<never>, appRole: string): Promise<void> {
  await sql`revoke create on schema public from public`.execute(owner);
  await sql`grant usage on schema public to ${sql.id(appRole)}`.execute(owner);
}

/**
 * Lets only the app's role and the owner connect to a database, and only the owner make schemas and temporary tables.
 * PostgreSQL does not copy these rights with a template, so a copy needs them anew.
 */
export async function closeDatabaseToPublic(owner: Kysely<never>, database: string, appRole: string): Promise<void> {
  await sql`revoke all on database ${sql.id(database)} from public`.execute(owner);
  await sql`revoke all on database ${sql.id(database)} from ${sql.id(appRole)}`.execute(owner);
  await sql`grant connect on database ${sql.id(database)} to ${sql.id(appRole)}`.execute(owner);
}

interface Powers {
  role: string;
  superuser: boolean;
  ownsTables: boolean;
  createsInPublic: boolean;
}

/**
 * Refuses a connection that could take the database's promises away: append-only tables and deciding triggers hold only
 * against a role that owns nothing. Memberships count, since a member can become the role it belongs to.
 * @throws AppError `database.role_too_powerful` {role, powers}
 */
export async function assertAppRoleIsWeak<T>(db: Kysely<T>): Promise<void> {
  const { rows } = await sql<Powers>`
    select current_user as "role",
      exists (select from pg_roles r where r.rolsuper and pg_has_role(current_user, r.oid, 'member')) as "superuser",
      exists (
        select from pg_class c join pg_namespace n on n.oid = c.relnamespace
        where n.nspname in ('public', 'pgboss') and c.relkind in ('r', 'p') and pg_has_role(current_user, c.relowner, 'member')
      ) as "ownsTables",
      has_schema_privilege(current_user, 'public', 'create') as "createsInPublic"
  `.execute(db);
  const found = rows[0];
  if (found === undefined) throw new AppError("database.unavailable", { message: "The database named no role" });
  const powers: string[] = [];
  if (found.superuser) powers.push("is a superuser");
  if (found.ownsTables) powers.push("owns tables");
  if (found.createsInPublic) powers.push("may create objects in the schema public");
  if (powers.length === 0) return;
  throw new AppError("database.role_too_powerful", {
    role: found.role,
    powers,
    message: `The app's database role "${found.role}" ${powers.join(" and ")}; give DATABASE_URL a role with fewer rights`,
  });
}
