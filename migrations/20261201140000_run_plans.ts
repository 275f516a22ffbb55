import { type Kysely, sql } from "kysely";

/** Batches that devices are made of, samples drawn at random, and planned runs with what was planned for them. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    alter table device
      add column gauge_batch text constraint device_gauge_batch_form check (gauge_batch ~ '^[A-Z0-9][A-Z0-9._-]{0,31}$'),
      add column material_batch text constraint device_material_batch_form check (material_batch ~ '^[A-Z0-9][A-Z0-9._-]{0,31}$');

    create table device_batch_correction (
      id uuid primary key,
      device_id uuid not null references device,
      gauge_batch text,
      material_batch text,
      reason text not null constraint device_batch_correction_reason check (length(trim(reason)) > 0),
      person_id uuid not null references person,
      at timestamptz not null
    );
    create index device_batch_correction_device on device_batch_correction (device_id, at);

    create or replace function guard_device() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare correction device_batch_correction;
    begin
      if (new.id, new.serial, new.lot_id, new.added_at, new.added_by)
        is distinct from (old.id, old.serial, old.lot_id, old.added_at, old.added_by) then
        perform refuse('device.immutable', old.serial);
      end if;
      -- A batch is told once; after that it changes only to what a correction with a reason names.
      if (old.gauge_batch is not null and new.gauge_batch is distinct from old.gauge_batch)
        or (old.material_batch is not null and new.material_batch is distinct from old.material_batch) then
        select * into correction from device_batch_correction where device_id = new.id order by at desc, id desc limit 1;
        if not found or (correction.gauge_batch, correction.material_batch) is distinct from (new.gauge_batch, new.material_batch) then
          perform refuse('device.batch_differs', old.serial);
        end if;
      end if;
      return new;
    end $$;

    create table sample_draw (
      id uuid primary key,
      lot_id uuid not null references lot,
      seed text not null,
      count integer not null constraint sample_draw_count check (count > 0),
      eligible integer not null,
      serials text[] not null,
      strata jsonb not null,
      left_out jsonb not null,
      method text not null,
      created_at timestamptz not null,
      created_by uuid not null references person
    );
    create index sample_draw_lot on sample_draw (lot_id, created_at);

    create table run_plan (
      id uuid primary key,
      lot_id uuid not null references lot,
      name text not null constraint run_plan_name check (length(trim(name)) > 0),
      purpose text not null constraint run_plan_purpose check (purpose in ('sample','zero','span','verification','proof')),
      points jsonb not null,
      notes text,
      sample_draw_id uuid references sample_draw,
      state text not null default 'planned' constraint run_plan_state check (state in ('planned','used','dropped')),
      drop_reason text,
      dropped_by uuid references person,
      dropped_at timestamptz,
      created_at timestamptz not null,
      created_by uuid not null references person,
      constraint run_plan_name_unique unique (lot_id, name),
      constraint run_plan_dropped check ((state = 'dropped') = (dropped_by is not null and dropped_at is not null and length(trim(coalesce(drop_reason, ''))) > 0))
    );

    create table run_plan_device (
      plan_id uuid not null references run_plan,
      device_id uuid not null references device,
      place integer not null,
      position text not null,
      primary key (plan_id, device_id),
      constraint run_plan_position_once unique (plan_id, position)
    );
    create index run_plan_device_device on run_plan_device (device_id);

    create table run_plan_equipment (
      plan_id uuid not null references run_plan,
      equipment_id uuid not null references equipment,
      primary key (plan_id, equipment_id)
    );

    alter table run add column plan_id uuid references run_plan;
    create index run_plan_runs on run (plan_id) where plan_id is not null;

    create function guard_run_plan() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if (to_jsonb(new) - array['state','drop_reason','dropped_by','dropped_at'])
        is distinct from (to_jsonb(old) - array['state','drop_reason','dropped_by','dropped_at']) then
        perform refuse('run_plan.immutable', old.name);
      end if;
      if old.state <> 'planned' or new.state not in ('used','dropped') then perform refuse('run_plan.wrong_state', old.state); end if;
      if new.state = 'used' and not exists (select 1 from run where plan_id = new.id) then
        perform refuse('run_plan.no_run', old.name);
      end if;
      return new;
    end $$;
    create trigger run_plan_guard before update on run_plan for each row execute function guard_run_plan();

    create function guard_planned_run() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare plan run_plan;
    begin
      select * into plan from run_plan where id = new.plan_id for update;
      if plan.lot_id <> new.lot_id then perform refuse('run_plan.other_lot', plan.name); end if;
      if plan.purpose <> new.purpose then perform refuse('run_plan.other_purpose', plan.purpose); end if;
      -- A plan is one chamber session: after its first run only a corrected file of that run may name it.
      if plan.state = 'dropped' or (plan.state = 'used'
        and not exists (select 1 from run r where r.id = new.supersedes_id and r.plan_id = plan.id)) then
        perform refuse('run_plan.wrong_state', plan.state);
      end if;
      return new;
    end $$;
    create trigger run_planned_guard before insert on run for each row when (new.plan_id is not null) execute function guard_planned_run();
  `.execute(db);
  await sql`
    select app_grant('select, insert, update', array['run_plan']),
           make_append_only(array['device_batch_correction','sample_draw','run_plan_device','run_plan_equipment'])
  `.execute(db);
}
