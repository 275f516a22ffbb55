import { type Kysely, sql } from "kysely";

/** Stations with their keys and what they report about every write. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create table station (
      id uuid primary key,
      name text not null constraint station_name_unique unique,
      active boolean not null default true,
      created_at timestamptz not null,
      created_by uuid not null references person,
      last_seen_at timestamptz
    );

    create table station_family (
      station_id uuid not null references station,
      family_id uuid not null references family,
      primary key (station_id, family_id)
    );

    create table station_key (
      id uuid primary key,
      station_id uuid not null references station,
      key_hash bytea not null constraint station_key_hash_unique unique,
      prefix text not null,
      created_at timestamptz not null,
      created_by uuid not null references person,
      last_used_at timestamptz,
      revoked_at timestamptz,
      revoked_by uuid references person
    );

    create table write_record (
      id uuid primary key,
      station_id uuid not null references station,
      counter bigint not null,
      serial text not null,
      device_id uuid references device,
      package_id uuid references package,
      package_reported text not null,
      image_sha256 bytea not null,
      result text not null constraint write_record_result check (result in ('written','failed','interrupted')),
      readback_sha256 bytea,
      serial_before text,
      hardware_id text,
      firmware text,
      zero_mv_v double precision,
      device_temp double precision,
      started_at timestamptz not null,
      finished_at timestamptz not null,
      operator text not null,
      detail text,
      outcome text not null constraint write_record_outcome check (outcome in ('verified','mismatch','failed','interrupted','unknown-image','unknown-serial')),
      flags text[] not null default '{}',
      content_sha256 bytea not null,
      received_at timestamptz not null
    );
    create index write_record_serial on write_record (serial, finished_at desc);
    create index write_record_device on write_record (device_id, finished_at desc);
    create index write_record_package on write_record (package_id);
    create index write_record_station on write_record (station_id, counter desc);
    create index write_record_received on write_record (received_at desc, id desc);
    create index write_record_trouble on write_record (received_at desc) where outcome <> 'verified' or flags <> '{}';
  `.execute(db);
  await sql`
    select app_grant('select, insert, update', array['station','station_key']),
           app_grant('select, insert, delete', array['station_family']),
           make_append_only(array['write_record'])
  `.execute(db);
}
