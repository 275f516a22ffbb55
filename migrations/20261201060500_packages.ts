import { type Kysely, sql } from "kysely";

/** Packages, images, checks, waivers, what is live and when, reinstatements, and the decisions the database itself refuses. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create table package (
      id uuid primary key,
      lot_id uuid not null references lot,
      layout_id uuid not null references layout,
      family_revision_id uuid not null references family_revision,
      version text not null,
      version_major integer not null,
      version_minor integer not null,
      version_patch integer not null,
      firmware text not null,
      notes text not null default '',
      state text not null constraint package_state check (state in ('building','draft','failed','in-review','approved','refused','live','superseded','withdrawn')),
      digest bytea,
      against_digest bytea,
      review_digest bytea,
      counts jsonb not null default '{}',
      progress_done integer not null default 0,
      progress_total integer not null default 0,
      progress_step text not null default '',
      failure jsonb,
      rebuild jsonb,
      created_at timestamptz not null,
      created_by uuid not null references person,
      built_at timestamptz,
      submitted_at timestamptz,
      submitted_by uuid references person,
      approved_at timestamptz,
      constraint package_version_unique unique (lot_id, version),
      constraint package_version_parts check (version = version_major || '.' || version_minor || '.' || version_patch)
    );
    create unique index package_one_live on package (lot_id) where state = 'live';
    create index package_lot on package (lot_id, created_at);

    create table package_derivation (
      package_id uuid not null references package,
      derivation_id uuid not null references derivation,
      primary key (package_id, derivation_id)
    );
    create index package_derivation_derivation on package_derivation (derivation_id);

    create table image (
      package_id uuid not null references package,
      device_id uuid not null references device,
      serial text collate "C" not null,
      coefficient_set_id uuid not null references coefficient_set,
      hardware_id text,
      bytes bytea not null,
      sha256 bytea not null,
      hex_sha256 bytea not null,
      primary key (package_id, device_id)
    );
    create index image_device on image (device_id, package_id);
    create unique index image_serial on image (package_id, serial);
    create index image_sha256 on image (sha256);
    create index image_set on image (coefficient_set_id);

    create table package_file (
      package_id uuid not null references package,
      name text not null,
      content bytea not null,
      sha256 bytea not null,
      primary key (package_id, name)
    );

    create table package_check (
      package_id uuid not null references package,
      position integer not null,
      code text not null,
      verdict text not null constraint package_check_verdict check (verdict in ('pass','warn','fail')),
      message text not null,
      evidence jsonb not null default '{}',
      primary key (package_id, code)
    );

    create table waiver (
      id uuid primary key,
      package_id uuid not null references package,
      check_code text not null,
      person_id uuid not null references person,
      person_name text not null,
      reason text not null constraint waiver_reason_given check (length(trim(reason)) > 0),
      at timestamptz not null,
      constraint waiver_once unique (package_id, check_code)
    );

    create table signing_key (
      id text primary key constraint signing_key_id_form check (id ~ '^[0-9a-f]{16}$'),
      public_pem text not null,
      from_at timestamptz not null,
      until_at timestamptz
    );

    create table live_period (
      id uuid primary key,
      lot_id uuid not null references lot,
      sequence integer not null,
      kind text not null constraint live_period_kind check (kind in ('release','reinstatement','withdrawal')),
      package_id uuid not null references package,
      reason text,
      person_id uuid not null references person,
      started_at timestamptz not null,
      release_document bytea,
      signature bytea,
      key_id text references signing_key,
      constraint live_period_sequence_unique unique (lot_id, sequence),
      constraint live_period_signed check (kind = 'withdrawal' or (release_document is not null and length(signature) = 64 and key_id is not null))
    );
    create index live_period_package on live_period (package_id, sequence desc);

    create table bundle_chunk (
      package_id uuid not null references package,
      sequence integer not null,
      position integer not null,
      content bytea not null,
      primary key (package_id, sequence, position)
    );

    create table bundle (
      package_id uuid not null references package,
      sequence integer not null,
      byte_count bigint not null,
      sha256 bytea not null,
      made_at timestamptz not null,
      primary key (package_id, sequence)
    );

    create table reinstatement (
      id uuid primary key,
      lot_id uuid not null references lot,
      package_id uuid not null references package,
      reason text not null constraint reinstatement_reason_given check (length(trim(reason)) > 0),
      state text not null constraint reinstatement_state check (state in ('asked','done','refused')),
      asked_by uuid not null references person,
      asked_at timestamptz not null,
      decided_at timestamptz
    );
    create unique index reinstatement_one_open on reinstatement (lot_id) where state = 'asked';
  `.execute(db);

  await sql`
    create function guard_package() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare fixed text[] := array['state','against_digest','review_digest','progress_done','progress_total','progress_step','rebuild',
                                  'submitted_at','submitted_by','approved_at'];
    begin
      if tg_op = 'INSERT' then
        if new.state <> 'building' then perform refuse('package.wrong_state', new.state); end if;
        return new;
      end if;
      if old.state <> 'building' and (to_jsonb(new) - fixed) is distinct from (to_jsonb(old) - fixed) then
        perform refuse('package.immutable', old.id::text);
      end if;
      if new.version <> old.version or new.lot_id <> old.lot_id or new.layout_id <> old.layout_id or new.created_by <> old.created_by then
        perform refuse('package.immutable', old.id::text);
      end if;
      if new.state = old.state then return new; end if;
      if not ((old.state = 'building' and new.state in ('draft','failed'))
           or (old.state = 'draft' and new.state = 'in-review')
           or (old.state = 'in-review' and new.state in ('draft','approved','refused'))
           or (old.state = 'approved' and new.state in ('live','draft'))
           or (old.state = 'live' and new.state in ('superseded','withdrawn'))
           or (old.state = 'superseded' and new.state = 'live')) then
        perform refuse('package.wrong_state', old.state || ' to ' || new.state);
      end if;
      if old.state = 'building' and new.state = 'draft' and new.digest is null then perform refuse('package.no_digest', new.id::text); end if;
      if new.state = 'in-review' then
        if exists (select 1 from package_check c where c.package_id = new.id and c.verdict = 'fail') then perform refuse('package.check_failed', new.id::text); end if;
        if exists (select 1 from package_check c where c.package_id = new.id and c.verdict = 'warn'
                   and not exists (select 1 from waiver w where w.package_id = c.package_id and w.check_code = c.code)) then
          perform refuse('package.not_waived', new.id::text);
        end if;
      end if;
      if new.state = 'approved' and not exists (
        select 1 from approval a where a.subject_kind = 'package' and a.subject_id = new.id and a.decision = 'approve'
          and a.digest = old.review_digest and a.at >= old.submitted_at) then
        perform refuse('package.not_approved', new.id::text);
      end if;
      if old.state = 'superseded' and new.state = 'live' and not exists (
        select 1 from reinstatement r join approval a on a.subject_kind = 'reinstatement' and a.subject_id = r.id and a.decision = 'approve'
        where r.package_id = new.id and r.state = 'asked') then
        perform refuse('package.not_approved', new.id::text);
      end if;
      return new;
    end $$;
    create trigger package_guard before insert or update on package for each row execute function guard_package();

    create function guard_built() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare current_state text;
    begin
      select state into current_state from package where id = new.package_id for share;
      if current_state <> 'building' then perform refuse('package.immutable', new.package_id::text); end if;
      return new;
    end $$;
    create trigger image_guard before insert on image for each row execute function guard_built();
    create trigger package_file_guard before insert on package_file for each row execute function guard_built();
    create trigger package_check_guard before insert on package_check for each row execute function guard_built();
    create trigger package_derivation_guard before insert on package_derivation for each row execute function guard_built();

    create function guard_maker() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare current_state text;
    begin
      if new.subject_kind = 'package' then
        select state into current_state from package where id = new.subject_id for share;
        if current_state not in ('building','draft') then perform refuse('package.makers_frozen', new.subject_id::text); end if;
      end if;
      return new;
    end $$;
    create trigger maker_guard before insert on maker for each row execute function guard_maker();

    create function is_maker(kind text, subject uuid, person uuid) returns boolean
    language sql stable set search_path = pg_catalog, public, pg_temp as $$
      select exists (select 1 from public.maker where subject_kind = kind and subject_id = subject and person_id = person)
    $$;

    create function guard_approval() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare current_state text; current_digest bytea; asker uuid; noun text;
    begin
      perform 1 from person where id = new.person_id for share;
      if not has_role(new.person_id, 'reviewer') then perform refuse('auth.forbidden', 'reviewer'); end if;
      noun := case new.subject_kind when 'family-revision' then 'family' else new.subject_kind end;
      if new.subject_kind = 'reinstatement' then
        select state, asked_by into current_state, asker from reinstatement where id = new.subject_id for update;
        if current_state is null then perform refuse('reinstatement.not_found', new.subject_id::text); end if;
        if current_state <> 'asked' then perform refuse('reinstatement.wrong_state', current_state); end if;
        if asker = new.person_id then perform refuse('reinstatement.self_approval', new.person_id::text); end if;
        return new;
      end if;
      if new.subject_kind = 'package' then
        select state, review_digest into current_state, current_digest from package where id = new.subject_id for update;
      elsif new.subject_kind = 'layout' then
        select state, sha256 into current_state, current_digest from layout where id = new.subject_id for update;
      elsif new.subject_kind = 'family-revision' then
        select state, sha256 into current_state, current_digest from family_revision where id = new.subject_id for update;
      else
        select state, sha256 into current_state, current_digest from derivation where id = new.subject_id for update;
      end if;
      if current_state is null then perform refuse(noun || '.not_found', new.subject_id::text); end if;
      if new.subject_kind = 'derivation' then
        if current_state not in ('proposed','partly-approved','approved') then perform refuse('derivation.wrong_state', current_state); end if;
      elsif new.decision = 'revoke' or current_state <> 'in-review' then
        perform refuse(noun || '.wrong_state', current_state);
      end if;
      if is_maker(new.subject_kind, new.subject_id, new.person_id) then perform refuse(noun || '.self_approval', new.person_id::text); end if;
      if new.digest is distinct from current_digest then perform refuse(noun || '.changed', encode(current_digest, 'hex')); end if;
      return new;
    end $$;
    create trigger approval_guard before insert on approval for each row execute function guard_approval();

    create function guard_waiver() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare current_state text; current_verdict text;
    begin
      select state into current_state from package where id = new.package_id for update;
      if current_state is distinct from 'draft' then perform refuse('package.wrong_state', current_state); end if;
      if not has_role(new.person_id, 'reviewer') then perform refuse('auth.forbidden', 'reviewer'); end if;
      if is_maker('package', new.package_id, new.person_id) then perform refuse('package.self_approval', new.person_id::text); end if;
      select verdict into current_verdict from package_check where package_id = new.package_id and code = new.check_code;
      if current_verdict is null then perform refuse('check.not_found', new.check_code); end if;
      if current_verdict <> 'warn' then perform refuse('check.not_waivable', new.check_code); end if;
      return new;
    end $$;
    create trigger waiver_guard before insert on waiver for each row execute function guard_waiver();

    create function guard_live_period() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare highest integer;
    begin
      perform 1 from lot where id = new.lot_id for update;
      select max(sequence) into highest from live_period where lot_id = new.lot_id;
      if new.sequence <> coalesce(highest, 0) + 1 then perform refuse('lot.sequence_falls', new.sequence::text); end if;
      return new;
    end $$;
    create trigger live_period_guard before insert on live_period for each row execute function guard_live_period();

    create function guard_reinstatement() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if old.state <> 'asked' or (to_jsonb(new) - array['state','decided_at']) is distinct from (to_jsonb(old) - array['state','decided_at']) then
        perform refuse('reinstatement.wrong_state', old.state);
      end if;
      if new.state = 'done' and not exists (
        select 1 from approval a where a.subject_kind = 'reinstatement' and a.subject_id = new.id and a.decision = 'approve') then
        perform refuse('reinstatement.not_approved', new.id::text);
      end if;
      return new;
    end $$;
    create function guard_signing_key() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if (to_jsonb(new) - 'until_at') is distinct from (to_jsonb(old) - 'until_at') then
        perform refuse('signing_key.immutable', old.id);
      end if;
      return new;
    end $$;
    create trigger signing_key_guard before update on signing_key for each row execute function guard_signing_key();
    create trigger reinstatement_guard before update on reinstatement for each row execute function guard_reinstatement();
  `.execute(db);
  await sql`
    select app_grant('select, insert, update', array['package','reinstatement','signing_key']),
           make_append_only(array['package_derivation','image','package_file','package_check','waiver','live_period','bundle','bundle_chunk'])
  `.execute(db);
}
