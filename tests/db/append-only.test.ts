import { sql } from "kysely";
import { beforeAll, describe, expect, it } from "vitest";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertMadeUpRow } from "../support/made-up-row";

/** What happened stays: nothing of these is ever changed or removed. A column stands beside each, to try a change with. */
const APPEND_ONLY = {
  acknowledgement: "reason",
  approval: "reason",
  bundle: "byte_count",
  bundle_chunk: "content",
  derivation_exclusion: "reason",
  derivation_finding: "message",
  derivation_run: "run_id",
  device_batch_correction: "reason",
  device_event: "reason",
  image: "bytes",
  import_file: "content",
  ledger_event: "canonical",
  live_period: "reason",
  maker: "act",
  package_check: "verdict",
  package_derivation: "derivation_id",
  package_file: "content",
  reading: "signal_mv_v",
  run: "purpose",
  run_equipment: "equipment_id",
  run_file: "content",
  run_finding: "message",
  run_plan_device: "position",
  run_plan_equipment: "equipment_id",
  sample_draw: "seed",
  waiver: "reason",
  write_record: "outcome",
};
const TABLES = Object.entries(APPEND_ONLY);

/** What the app deletes in its work: sessions that ended, replies and log lines past their time, a station's list of families. */
const DELETABLE = ["access_log", "idempotent_reply", "layout", "mail", "password_link", "session", "station_family"];

/** Columns that only some values fit, as SQL. */
const MADE_UP: Record<string, Record<string, string>> = {
  live_period: { kind: "'withdrawal'" },
  package_file: { content: "''" },
};

let database: TestDatabase;
beforeAll(async () => {
  database = await openTestDatabase();
  for (const table of Object.keys(APPEND_ONLY)) {
    await insertMadeUpRow(database.owner, table, MADE_UP[table]);
  }
});

const update = (table: string, column: string) =>
  sql`update ${sql.table(table)} set ${sql.id(column)} = ${sql.id(column)}`;
const remove = (table: string) => sql`delete from ${sql.table(table)}`;
const truncate = (table: string) => sql`truncate ${sql.table(table)} cascade`;

async function countRows(table: string): Promise<number> {
  const { rows } = await sql<{ count: string }>`select count(*) as count from ${sql.table(table)}`.execute(
    database.owner,
  );
  return Number(rows[0]?.count);
}

describe("an append-only table", () => {
  it.each(TABLES)("%s grants the app no change and no removal", async (table, column) => {
    for (const statement of [update(table, column), remove(table), truncate(table)]) {
      await expect(statement.execute(database.db)).rejects.toMatchObject({ code: "42501" });
    }
  });

  it.each(TABLES)("%s refuses its own owner a change and a removal", async (table, column) => {
    for (const statement of [update(table, column), remove(table), truncate(table)]) {
      const refusal = { code: "TW001", message: "database.append_only" };
      await expect(statement.execute(database.owner)).rejects.toMatchObject(refusal);
    }
    expect(await countRows(table)).toBe(1);
  });

  it("takes no replacement by way of a conflict either", async () => {
    const replace = sql`insert into maker (id, subject_kind, subject_id, person_id, act, at)
      select id, subject_kind, subject_id, person_id, 'derived', at from maker on conflict (id) do update set act = excluded.act`;
    await expect(replace.execute(database.db)).rejects.toMatchObject({ code: "42501" });
    await expect(replace.execute(database.owner)).rejects.toMatchObject({ message: "database.append_only" });
  });

  it("is what every table is that the app may add to and not change", async () => {
    const { rows } = await sql<{ table: string }>`
      select c.relname as "table" from pg_class c where c.relnamespace = 'public'::regnamespace and c.relkind = 'r'
        and has_table_privilege('trimwright_app', c.oid, 'insert') and not has_any_column_privilege('trimwright_app', c.oid, 'update')
        and not has_table_privilege('trimwright_app', c.oid, 'delete') order by c.relname
    `.execute(database.owner);
    expect(rows.map(({ table }) => table)).toEqual(Object.keys(APPEND_ONLY).sort());
  });
});

describe("the app's role", () => {
  it("empties no table, and deletes from those only that hold nothing of the trace", async () => {
    const { rows } = await sql<{ table: string; truncates: boolean }>`
      select relname as "table", has_table_privilege('trimwright_app', oid, 'truncate') as "truncates" from pg_class
      where relnamespace = 'public'::regnamespace and relkind = 'r'
        and has_table_privilege('trimwright_app', oid, 'delete, truncate, references, trigger') order by relname
    `.execute(database.owner);
    expect(rows).toEqual(DELETABLE.map((table) => ({ table, truncates: false })));
  });

  it("owns nothing and belongs to nobody", async () => {
    const { rows } = await sql<{ name: string }>`
      select c.relname as name from pg_class c where pg_has_role('trimwright_app', c.relowner, 'member')
      union all select p.proname from pg_proc p where pg_has_role('trimwright_app', p.proowner, 'member')
      union all select n.nspname from pg_namespace n where pg_has_role('trimwright_app', n.nspowner, 'member')
      union all select d.datname from pg_database d where pg_has_role('trimwright_app', d.datdba, 'member')
      union all select r.rolname from pg_auth_members m join pg_roles r on r.oid = m.roleid
        where m.member = 'trimwright_app'::regrole
    `.execute(database.owner);
    expect(rows).toEqual([]);
  });

  it("switches no trigger off and takes no other role", async () => {
    const statements = [
      sql`alter table maker disable trigger all`,
      sql`drop trigger maker_append_only on maker`,
      sql`set session_replication_role = replica`,
      sql`set role trimwright_owner`,
      sql`select make_append_only(array['session'])`,
      sql`select app_grant('update', array['maker'])`,
    ];
    for (const statement of statements)
      await expect(statement.execute(database.db)).rejects.toMatchObject({ code: "42501" });
  });

  it("reads the migrator's notes and writes none", async () => {
    await expect(sql`select name from kysely_migration`.execute(database.db)).resolves.toBeDefined();
    await expect(sql`delete from kysely_migration`.execute(database.db)).rejects.toMatchObject({ code: "42501" });
  });
});

describe("functions", () => {
  it("look names up in a fixed path and run with the rights of who calls them", async () => {
    const { rows } = await sql<{ name: string; path: string[] | null; definer: boolean }>`
      select proname as name, proconfig as path, prosecdef as definer from pg_proc where pronamespace = 'public'::regnamespace
    `.execute(database.owner);
    expect(rows.length).toBeGreaterThan(15);
    const loose = rows.filter(
      ({ path, definer }) => definer || !path?.includes("search_path=pg_catalog, public, pg_temp"),
    );
    expect(loose).toEqual([]);
  });

  it("of triggers are all switched on", async () => {
    const { rows } = await sql`select tgname from pg_trigger where not tgisinternal and tgenabled <> 'O'`.execute(
      database.owner,
    );
    expect(rows).toEqual([]);
  });
});

describe("what is settled", () => {
  it.each([
    ["layout", "in-review", "document = '[]'", "layout.wrong_state"],
    ["layout", "published", "source = '{}'", "layout.wrong_state"],
    ["layout", "retired", "version = '9.9.9'", "layout.wrong_state"],
    ["family_revision", "published", "document = '{\"capacityKg\":1}'", "family.wrong_state"],
    ["package", "draft", "digest = '\\x01'", "package.immutable"],
    ["package", "live", "layout_id = gen_random_uuid()", "package.immutable"],
    ["package", "withdrawn", "notes = 'other'", "package.immutable"],
  ])("a %s once %s keeps its content from the app and its owner", async (table, state, set, code) => {
    const version = table === "package" ? { version_major: "1", version_minor: "1", version_patch: "1" } : {};
    await insertMadeUpRow(database.owner, table, { state: `'${state}'`, ...version });
    const statement = sql`update ${sql.table(table)} set ${sql.raw(set)} where state = ${state}`;
    for (const db of [database.db, database.owner]) {
      await expect(statement.execute(db)).rejects.toMatchObject({ code: "TW001", message: code });
    }
  });

  it.each([
    ["device", "serial = 'B'", "device.immutable"],
    ["device", "lot_id = gen_random_uuid()", "device.immutable"],
    ["lot", "family_revision_id = gen_random_uuid()", "lot.immutable"],
    ["lot", "firmware = '9.9.9'", "lot.immutable"],
    ["signing_key", "public_pem = 'another'", "signing_key.immutable"],
    ["ledger_text", "content = 'another'", "ledger.text_immutable"],
  ])("a %s never gets %s", async (table, set, code) => {
    const id = table === "signing_key" ? { id: "md5(random()::text)::varchar(16)" } : {};
    const name = table === "ledger_text" ? { name: "md5(random()::text)", content: "'said'" } : {};
    const own = { code: "upper(md5(random()::text))", serial: "upper(md5(random()::text))" };
    await insertMadeUpRow(database.owner, table, { ...id, ...name, ...own });
    const statement = sql`update ${sql.table(table)} set ${sql.raw(set)}`;
    for (const db of [database.db, database.owner]) {
      await expect(statement.execute(db)).rejects.toMatchObject({ code: "TW001", message: code });
    }
  });

  it("a ledger text is erased and not rewritten", async () => {
    await insertMadeUpRow(database.owner, "ledger_text", { name: "'reason'", content: "'said'" });
    await sql`update ledger_text set content = null`.execute(database.db);
    await expect(sql`update ledger_text set content = 'later'`.execute(database.db)).rejects.toMatchObject({
      message: "ledger.text_immutable",
    });
  });

  it("an image joins no package that is built", async () => {
    await insertMadeUpRow(database.owner, "package", {
      id: "'00000000-0000-7000-8000-000000000001'",
      state: "'superseded'",
      version: "'2.0.0'",
      ...{ version_major: "2", version_minor: "0", version_patch: "0" },
    });
    const row = sql`insert into image (package_id, device_id, serial, coefficient_set_id, bytes, sha256, hex_sha256)
      values ('00000000-0000-7000-8000-000000000001', gen_random_uuid(), 'A', gen_random_uuid(), '\\x00', '\\x00', '\\x00')`;
    await expect(row.execute(database.db)).rejects.toMatchObject({ code: "TW001", message: "package.immutable" });
  });
});
