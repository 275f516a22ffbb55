import { type Kysely, sql } from "kysely";

/** Functions that every later migration leans on: grants to the app's role and the refusals of append-only tables. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create function app_grant(privileges text, table_names text[]) returns void
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare
      app_role text := coalesce(nullif(current_setting('trimwright.app_role', true), ''), 'trimwright_app');
      table_name text;
    begin
      foreach table_name in array table_names loop
        execute format('grant %s on table public.%I to %I', privileges, table_name, app_role);
      end loop;
    end $$;
  `.execute(db);
  await sql`revoke execute on function app_grant(text, text[]) from public`.execute(db);

  await sql`
    create function refuse_change() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      raise exception using errcode = 'TW001', message = 'database.append_only',
        detail = format('%s on %s', tg_op, tg_table_name);
    end $$;
  `.execute(db);

  await sql`
    create function make_append_only(table_names text[]) returns void
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare table_name text;
    begin
      foreach table_name in array table_names loop
        execute format('create trigger %I before update or delete on public.%I for each row execute function public.refuse_change()', table_name || '_append_only', table_name);
        execute format('create trigger %I before truncate on public.%I for each statement execute function public.refuse_change()', table_name || '_no_truncate', table_name);
        perform public.app_grant('select, insert', array[table_name]);
      end loop;
    end $$;
  `.execute(db);
  await sql`revoke execute on function make_append_only(text[]) from public`.execute(db);

  await sql`
    create function refuse(code text, fact text) returns void
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      raise exception using errcode = 'TW001', message = code, detail = coalesce(fact, '');
    end $$;
  `.execute(db);
}
