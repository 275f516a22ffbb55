import { type Kysely, sql } from "kysely";

/**
 * Readings are held against their run and devices once a statement instead of twice a row, which took longer than storing them.
 * The check is stricter than the foreign keys that it replaces: a reading's device belongs to the lot of its run. What those keys
 * kept besides stands here: devices stay for ever, as runs do.
 */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create function guard_readings() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare stray uuid;
    begin
      select pair.device_id into stray
        from (select distinct run_id, device_id from added) pair
        left join run on run.id = pair.run_id
        left join device on device.id = pair.device_id and device.lot_id = run.lot_id
        where device.id is null limit 1;
      if found then perform refuse('reading.device_of_other_lot', stray::text); end if;
      return null;
    end $$;
    create trigger reading_guard after insert on reading referencing new table as added
      for each statement execute function guard_readings();

    alter table reading drop constraint reading_run_id_fkey, drop constraint reading_device_id_fkey;

    -- The bytes of a run as uploaded: lz4 takes a tenth of the time of the usual compression. A server without it keeps that one.
    do $$ begin
      alter table run_file alter column content set compression lz4;
    exception when feature_not_supported then null;
    end $$;

    create trigger device_no_delete before delete on device for each row execute function refuse_change();
    create trigger device_no_truncate before truncate on device for each statement execute function refuse_change();
  `.execute(db);
}
