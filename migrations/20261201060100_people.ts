import { type Kysely, sql } from "kysely";

/** People, their roles and sessions, keys, mailed links, the access log and stored replies of repeated requests. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create table person (
      id uuid primary key,
      email text not null constraint person_email_lower check (email = lower(email)),
      name text not null constraint person_name_length check (length(name) between 1 and 120),
      password_hash text,
      active boolean not null default true,
      one_time_secret text,
      one_time_enrolled_at timestamptz,
      one_time_last_step bigint,
      created_at timestamptz not null,
      created_by uuid references person,
      constraint person_email_unique unique (email)
    );

    create table role_grant (
      id uuid primary key,
      person_id uuid not null references person,
      role text not null constraint role_grant_role check (role in ('engineer','reviewer','operator','service','auditor','admin')),
      asked_by uuid references person,
      asked_at timestamptz not null,
      confirmed_by uuid references person,
      confirmed_at timestamptz,
      ended_by uuid references person,
      ended_at timestamptz,
      constraint role_grant_not_own check (asked_by is distinct from person_id and confirmed_by is distinct from person_id),
      constraint role_grant_second_admin check (
        asked_by is null or confirmed_at is null or role not in ('reviewer','admin') or (confirmed_by is not null and confirmed_by <> asked_by))
    );
    create unique index role_grant_open on role_grant (person_id, role) where ended_at is null;

    create function has_role(person uuid, wanted text) returns boolean
    language sql stable set search_path = pg_catalog, public, pg_temp as $$
      select exists (
        select 1 from public.role_grant g join public.person p on p.id = g.person_id
        where g.person_id = person and g.role = wanted and g.confirmed_at is not null and g.ended_at is null and p.active)
    $$;

    create table session (
      id uuid primary key,
      person_id uuid not null references person,
      created_at timestamptz not null,
      expires_at timestamptz not null,
      last_seen_at timestamptz not null,
      ended_at timestamptz,
      user_agent text not null default '',
      address text not null default ''
    );
    create index session_person on session (person_id) where ended_at is null;

    create table password_link (
      token_hash bytea primary key,
      person_id uuid not null references person,
      purpose text not null constraint password_link_purpose check (purpose in ('invite','reset')),
      created_at timestamptz not null,
      expires_at timestamptz not null,
      used_at timestamptz
    );

    create table access_key (
      id uuid primary key,
      person_id uuid not null references person,
      name text not null,
      key_hash bytea not null constraint access_key_hash_unique unique,
      prefix text not null,
      created_at timestamptz not null,
      expires_at timestamptz not null,
      last_used_at timestamptz,
      revoked_at timestamptz
    );

    create table access_log (
      id bigint generated always as identity primary key,
      at timestamptz not null,
      kind text not null,
      person_id uuid references person,
      station_id uuid,
      address text not null default '',
      detail jsonb not null default '{}'
    );
    create index access_log_at on access_log (at);

    create table idempotent_reply (
      actor_id uuid not null,
      route text not null,
      key text not null constraint idempotent_reply_key_length check (length(key) between 1 and 200),
      body_sha256 bytea not null,
      status integer,
      body jsonb,
      created_at timestamptz not null,
      primary key (actor_id, route, key)
    );

    create table mail (
      id uuid primary key,
      person_id uuid references person,
      to_address text not null,
      template text not null,
      subject text not null,
      body text not null,
      created_at timestamptz not null,
      sent_at timestamptz,
      attempts integer not null default 0,
      last_error text
    );
    create index mail_created on mail (created_at desc);
  `.execute(db);
  await sql`
    select app_grant('select, insert, update', array['person','role_grant','session','password_link','access_key','mail']),
           app_grant('select, insert, update, delete', array['idempotent_reply','access_log'])
  `.execute(db);
}
