import { type Kysely, sql } from "kysely";

/**
 * What an uncertainty budget needs of a certificate (the coverage factor, a chamber's uniformity by position), as it is and as
 * it was when a run used it; the column mapping last accepted for a family; the file that a mapped run was made from.
 */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    alter table equipment
      add coverage_factor double precision not null default 2 constraint equipment_coverage_factor check (coverage_factor > 0),
      add positions jsonb not null default '[]' constraint equipment_positions check (jsonb_typeof(positions) = 'array'),
      add constraint equipment_positions_of_chamber check (kind = 'chamber' or positions = '[]');

    alter table run_equipment
      add coverage_factor double precision not null default 2,
      add positions jsonb not null default '[]';

    alter table run add source_sha256 bytea constraint run_source_sha256 check (length(source_sha256) = 32);

    create table reading_mapping (
      family_id uuid primary key references family,
      mapping jsonb not null,
      updated_at timestamptz not null,
      updated_by uuid not null references person
    );
  `.execute(db);
  await sql`select app_grant('select, insert, update', array['reading_mapping'])`.execute(db);
}
