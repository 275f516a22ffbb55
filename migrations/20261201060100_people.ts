import { type Kysely, sql } from "kysely";

/** People, their roles and sessions, keys, mailed links, the access log, stored replies of repeated requests, and mail. */
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

    create function guard_role_grant() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if tg_op = 'UPDATE' then
        if (new.id, new.person_id, new.role, new.asked_by, new.asked_at)
          is distinct from (old.id, old.person_id, old.role, old.asked_by, old.asked_at) then
          perform refuse('role.wrong_state', 'who asked for what stays as written');
        end if;
        if old.ended_at is not null then perform refuse('role.wrong_state', 'ended'); end if;
        if old.confirmed_at is not null and (new.confirmed_by, new.confirmed_at)
          is distinct from (old.confirmed_by, old.confirmed_at) then
          perform refuse('role.wrong_state', 'confirmed');
        end if;
      elsif new.asked_by is not null and not has_role(new.asked_by, 'admin') then
        perform refuse('auth.forbidden', 'a role is asked for by an admin');
      end if;
      if new.confirmed_by is not null and (tg_op = 'INSERT' or old.confirmed_by is null)
        and not has_role(new.confirmed_by, 'admin') then
        perform refuse('auth.forbidden', 'a role is confirmed by an admin');
      end if;
      return new;
    end $$;
    create trigger role_grant_guard before insert or update on role_grant for each row execute function guard_role_grant();

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
      kept_at timestamptz,
      attempts integer not null default 0,
      last_error text
    );
    create index mail_created on mail (created_at desc);
  `.execute(db);
  await sql`
    select app_grant('select, insert, update', array['person','role_grant','access_key']),
           app_grant('select, insert, update, delete', array['session','password_link','mail','idempotent_reply','access_log'])
  `.execute(db);
}
