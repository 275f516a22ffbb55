import { type Kysely, sql } from "kysely";

/** Derivations with their findings, coefficient sets and acknowledgements. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create table derivation (
      id uuid primary key,
      lot_id uuid not null references lot,
      family_revision_id uuid not null references family_revision,
      method text not null constraint derivation_method check (method in ('individual','pooled-gain','import')),
      fit_order integer not null constraint derivation_order check (fit_order in (1, 2)),
      state text not null constraint derivation_state check (state in ('working','proposed','approved','partly-approved','refused','failed')),
      engine text not null,
      sha256 bytea not null,
      proven_low_c double precision,
      proven_high_c double precision,
      pooled jsonb,
      verification jsonb not null default '[]',
      counts jsonb not null default '{}',
      progress_done integer not null default 0,
      progress_total integer not null default 0,
      progress_step text not null default '',
      failure jsonb,
      created_at timestamptz not null,
      created_by uuid not null references person,
      finished_at timestamptz
    );
    create index derivation_lot on derivation (lot_id, created_at);

    create table derivation_run (
      derivation_id uuid not null references derivation,
      run_id uuid not null references run,
      primary key (derivation_id, run_id)
    );
    create index derivation_run_run on derivation_run (run_id);

    create table derivation_exclusion (
      derivation_id uuid not null references derivation,
      device_id uuid not null references device,
      reason text not null,
      person_id uuid not null references person,
      primary key (derivation_id, device_id)
    );

    create table import_file (
      derivation_id uuid primary key references derivation,
      sha256 bytea not null,
      content bytea not null
    );

    create table derivation_finding (
      id uuid primary key,
      derivation_id uuid not null references derivation,
      code text not null,
      severity text not null constraint derivation_finding_severity check (severity in ('hard','soft','note')),
      serial text,
      point integer,
      message text not null,
      data jsonb not null default '{}'
    );
    create index derivation_finding_derivation on derivation_finding (derivation_id);

    create table coefficient_set (
      id uuid primary key,
      derivation_id uuid not null references derivation,
      device_id uuid not null references device,
      role text not null constraint coefficient_set_role check (role in ('sample','zero','verification','excluded','imported')),
      state text constraint coefficient_set_state check (state in ('proposed','approved','refused','stale','revoked')),
      temp_offset double precision,
      temp_slope double precision,
      zero double precision,
      zero_tc double precision,
      zero_tc2 double precision,
      gain double precision,
      gain_tc double precision,
      gain_tc2 double precision,
      detail jsonb not null,
      created_at timestamptz not null,
      state_changed_at timestamptz not null,
      constraint coefficient_set_once unique (derivation_id, device_id),
      constraint coefficient_set_state_needs_values check ((state is null) = (gain is null))
    );
    create index coefficient_set_device on coefficient_set (device_id, created_at desc);

    create table acknowledgement (
      id uuid primary key,
      derivation_id uuid not null references derivation,
      finding_id uuid not null references derivation_finding,
      approval_id uuid not null references approval,
      person_id uuid not null references person,
      reason text not null constraint acknowledgement_reason_given check (length(trim(reason)) > 0),
      at timestamptz not null
    );
    create index acknowledgement_derivation on acknowledgement (derivation_id);
  `.execute(db);

  await sql`
    create function guard_coefficient_set() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if tg_op = 'INSERT' then
        if new.state is not null and new.state <> 'proposed' then perform refuse('coefficients.wrong_state', new.state); end if;
        return new;
      end if;
      if (to_jsonb(new) - 'state' - 'state_changed_at') is distinct from (to_jsonb(old) - 'state' - 'state_changed_at') then
        perform refuse('coefficients.immutable', old.id::text);
      end if;
      if new.state is distinct from old.state then
        if old.state is null or new.state is null
           or not ((old.state = 'proposed' and new.state in ('approved','refused','stale')) or (old.state = 'approved' and new.state in ('stale','revoked'))) then
          perform refuse('coefficients.wrong_state', coalesce(old.state, 'none') || ' to ' || coalesce(new.state, 'none'));
        end if;
        if new.state = 'approved' and not exists (
          select 1 from approval a where a.subject_kind = 'derivation' and a.subject_id = new.derivation_id and a.decision = 'approve') then
          perform refuse('coefficients.not_approved', new.id::text);
        end if;
      end if;
      return new;
    end $$;
    create trigger coefficient_set_guard before insert or update on coefficient_set for each row execute function guard_coefficient_set();

    create function guard_derivation() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if old.state <> 'working' and (to_jsonb(new) - 'state') is distinct from (to_jsonb(old) - 'state') then
        perform refuse('derivation.immutable', old.id::text);
      end if;
      if new.lot_id <> old.lot_id or new.family_revision_id <> old.family_revision_id or new.method <> old.method
         or new.fit_order <> old.fit_order or new.sha256 <> old.sha256 or new.created_by <> old.created_by then
        perform refuse('derivation.immutable', old.id::text);
      end if;
      return new;
    end $$;
    create trigger derivation_guard before update on derivation for each row execute function guard_derivation();
  `.execute(db);
  await sql`
    select app_grant('select, insert, update', array['derivation','coefficient_set']),
           make_append_only(array['derivation_run','derivation_exclusion','import_file','derivation_finding','acknowledgement'])
  `.execute(db);
}
