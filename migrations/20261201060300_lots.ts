import { type Kysely, sql } from "kysely";

/** Lots, devices and their events, thermal runs with the bytes as uploaded, and readings. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create table lot (
      id uuid primary key,
      code text not null constraint lot_code_unique unique constraint lot_code_form check (code ~ '^[A-Z0-9][A-Z0-9._-]{0,31}$'),
      family_id uuid not null references family,
      family_revision_id uuid not null references family_revision,
      firmware text not null,
      sequence integer not null default 0,
      created_at timestamptz not null,
      created_by uuid not null references person
    );
    create index lot_family on lot (family_id);

    create function guard_lot() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if new.sequence < old.sequence then perform refuse('lot.sequence_falls', old.code); end if;
      if (to_jsonb(new) - 'sequence') is distinct from (to_jsonb(old) - 'sequence') then perform refuse('lot.immutable', old.code); end if;
      return new;
    end $$;
    create trigger lot_guard before update on lot for each row execute function guard_lot();

    create table device (
      id uuid primary key,
      serial text not null constraint device_serial_unique unique constraint device_serial_form check (serial ~ '^[A-Z0-9][A-Z0-9._-]{0,31}$'),
      lot_id uuid not null references lot,
      hardware_id text,
      firmware text,
      held boolean not null default false,
      scrapped boolean not null default false,
      shipped boolean not null default false,
      added_at timestamptz not null,
      added_by uuid not null references person
    );
    create index device_lot on device (lot_id, serial);

    create function guard_device() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if (new.id, new.serial, new.lot_id, new.added_at, new.added_by)
        is distinct from (old.id, old.serial, old.lot_id, old.added_at, old.added_by) then
        perform refuse('device.immutable', old.serial);
      end if;
      return new;
    end $$;
    create trigger device_guard before update on device for each row execute function guard_device();

    create table device_event (
      id uuid primary key,
      device_id uuid not null references device,
      kind text not null constraint device_event_kind check (kind in ('hold','resume','scrap','rework','board-replaced','firmware','shipped','returned')),
      reason text not null,
      reference text,
      hardware_id text,
      firmware text,
      person_id uuid not null references person,
      at timestamptz not null
    );
    create index device_event_device on device_event (device_id, at);

    create function guard_device_event() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare holder uuid;
    begin
      perform 1 from device where id = new.device_id for update;
      if new.kind = 'resume' then
        select person_id into holder from device_event where device_id = new.device_id and kind = 'hold' order by at desc, id desc limit 1;
        if holder is null then perform refuse('device.not_held', new.device_id::text); end if;
        if holder = new.person_id then perform refuse('device.self_approval', new.device_id::text); end if;
      end if;
      return new;
    end $$;
    create trigger device_event_guard before insert on device_event for each row execute function guard_device_event();

    create table run (
      id uuid primary key,
      lot_id uuid not null references lot,
      purpose text not null constraint run_purpose check (purpose in ('sample','zero','span','verification','proof')),
      sha256 bytea not null,
      byte_count integer not null,
      row_count integer not null,
      device_count integer not null,
      file_name text,
      temperature_low_c double precision,
      temperature_high_c double precision,
      supersedes_id uuid references run constraint run_supersedes_once unique,
      reason text,
      created_at timestamptz not null,
      created_by uuid not null references person,
      constraint run_bytes_once unique (lot_id, sha256),
      constraint run_supersedes_reason check (supersedes_id is null or length(trim(coalesce(reason, ''))) > 0)
    );
    create index run_lot on run (lot_id, created_at);

    create table run_file (
      run_id uuid primary key references run,
      content bytea not null
    );

    create table run_equipment (
      run_id uuid not null references run,
      equipment_id uuid not null references equipment,
      certificate text not null,
      calibrated_until date not null,
      uncertainty double precision not null,
      primary key (run_id, equipment_id)
    );
    create index run_equipment_equipment on run_equipment (equipment_id);

    create table run_finding (
      id uuid primary key,
      run_id uuid not null references run,
      code text not null,
      severity text not null constraint run_finding_severity check (severity in ('hard','soft','note')),
      serial text,
      point integer,
      message text not null,
      data jsonb not null default '{}'
    );
    create index run_finding_run on run_finding (run_id);

    create table reading (
      run_id uuid not null references run,
      row_number integer not null,
      device_id uuid not null references device,
      point integer not null,
      chamber_c double precision not null,
      soak_min double precision not null,
      device_temp double precision not null,
      load_kg double precision not null,
      signal_mv_v double precision not null,
      taken_at timestamptz not null,
      position text,
      hardware_id text,
      dwell_s double precision,
      output_mv_v double precision,
      primary key (run_id, row_number)
    );
    create index reading_device on reading (device_id, run_id);
  `.execute(db);
  await sql`
    select app_grant('select, insert, update', array['lot','device']),
           make_append_only(array['device_event','run','run_file','run_equipment','run_finding','reading'])
  `.execute(db);
}
