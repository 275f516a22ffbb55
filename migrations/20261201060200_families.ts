import { type Kysely, sql } from "kysely";

/** Families with frozen revisions, layouts, equipment, and the evidence of who made and who decided. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create table family (
      id uuid primary key,
      code text not null constraint family_code_unique unique constraint family_code_form check (code ~ '^[A-Z0-9][A-Z0-9._-]{0,31}$'),
      created_at timestamptz not null,
      created_by uuid not null references person
    );

    create table family_revision (
      id uuid primary key,
      family_id uuid not null references family,
      number integer not null constraint family_revision_number_positive check (number > 0),
      state text not null constraint family_revision_state check (state in ('draft','in-review','published','retired')),
      document jsonb not null,
      sha256 bytea not null,
      created_at timestamptz not null,
      created_by uuid not null references person,
      submitted_at timestamptz,
      submitted_by uuid references person,
      published_at timestamptz,
      retired_at timestamptz,
      constraint family_revision_number_unique unique (family_id, number)
    );

    create table layout (
      id uuid primary key,
      family_id uuid not null references family,
      version text not null,
      state text not null constraint layout_state check (state in ('draft','in-review','published','retired')),
      source text not null,
      document jsonb not null,
      sha256 bytea not null,
      draft_number integer not null default 1,
      step text,
      created_at timestamptz not null,
      created_by uuid not null references person,
      updated_at timestamptz not null,
      updated_by uuid not null references person,
      submitted_at timestamptz,
      submitted_by uuid references person,
      published_at timestamptz,
      retired_at timestamptz,
      constraint layout_version_unique unique (family_id, version)
    );

    create table equipment (
      id uuid primary key,
      code text not null constraint equipment_code_unique unique constraint equipment_code_form check (code ~ '^[A-Z0-9][A-Z0-9._-]{0,31}$'),
      kind text not null constraint equipment_kind check (kind in ('sensor','chamber','load','reader')),
      certificate text not null,
      calibrated_until date not null,
      uncertainty double precision not null,
      created_at timestamptz not null,
      created_by uuid not null references person,
      updated_at timestamptz not null
    );

    create table maker (
      id uuid primary key,
      subject_kind text not null constraint maker_subject_kind check (subject_kind in ('family-revision','layout','derivation','package')),
      subject_id uuid not null,
      person_id uuid not null references person,
      act text not null constraint maker_act check (act in ('wrote','uploaded','derived','excluded','imported','built','submitted')),
      at timestamptz not null
    );
    create index maker_subject on maker (subject_kind, subject_id, person_id);

    create table approval (
      id uuid primary key,
      subject_kind text not null constraint approval_subject_kind check (subject_kind in ('family-revision','layout','derivation','package','reinstatement')),
      subject_id uuid not null,
      decision text not null constraint approval_decision check (decision in ('approve','refuse','revoke')),
      person_id uuid not null references person,
      person_name text not null,
      meaning text not null,
      reason text,
      digest bytea,
      serial_count integer,
      at timestamptz not null,
      constraint approval_reason_given check (decision = 'approve' or length(trim(coalesce(reason, ''))) > 0)
    );
    create index approval_subject on approval (subject_kind, subject_id, at);
  `.execute(db);

  await sql`
    create function guard_published() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare kind text := case tg_table_name when 'layout' then 'layout' else 'family-revision' end;
            noun text := case tg_table_name when 'layout' then 'layout' else 'family' end;
            moving text[] := array['state','submitted_at','submitted_by','published_at','retired_at','updated_at','updated_by'];
    begin
      if tg_op = 'DELETE' then
        if old.state <> 'draft' then perform refuse(noun || '.wrong_state', old.state); end if;
        return old;
      end if;
      if tg_op = 'INSERT' then
        if new.state <> 'draft' then perform refuse(noun || '.wrong_state', new.state); end if;
        return new;
      end if;
      if old.state <> 'draft' and (to_jsonb(new) - moving) is distinct from (to_jsonb(old) - moving) then
        perform refuse(noun || '.wrong_state', old.state);
      end if;
      if new.state <> old.state then
        if not ((old.state = 'draft' and new.state = 'in-review') or (old.state = 'in-review' and new.state in ('draft','published'))
             or (old.state = 'published' and new.state = 'retired')) then
          perform refuse(noun || '.wrong_state', old.state || ' to ' || new.state);
        end if;
        if new.state = 'published' and not exists (
          select 1 from approval a where a.subject_kind = kind and a.subject_id = new.id and a.decision = 'approve' and a.digest = new.sha256) then
          perform refuse(noun || '.not_approved', new.id::text);
        end if;
      end if;
      return new;
    end $$;

    create trigger family_revision_guard before insert or update or delete on family_revision for each row execute function guard_published();
    create trigger layout_guard before insert or update or delete on layout for each row execute function guard_published();
  `.execute(db);

  await sql`
    select app_grant('select, insert, update', array['family','family_revision','equipment']),
           app_grant('select, insert, update, delete', array['layout']),
           make_append_only(array['maker','approval'])
  `.execute(db);
}
