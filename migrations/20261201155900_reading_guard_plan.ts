import { type Kysely, sql } from "kysely";

/**
 * The check of a statement's readings is planned anew each time. A plan made for a small run was kept for the session and took
 * seconds over a large one: it compared every reading's device with every device there is.
 */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create or replace function guard_readings() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare stray uuid;
    begin
      execute 'select pair.device_id
        from (select distinct run_id, device_id from added) pair
        left join run on run.id = pair.run_id
        left join device on device.id = pair.device_id and device.lot_id = run.lot_id
        where device.id is null limit 1' into stray;
      if stray is not null then perform refuse('reading.device_of_other_lot', stray::text); end if;
      return null;
    end $$;
  `.execute(db);
}
