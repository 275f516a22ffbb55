import { type Kysely, sql } from "kysely";

/** Drafts whose text has moved on from their last error-free document, so that half a thought can be kept too. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    alter table layout
      add column unfinished boolean not null default false,
      add constraint layout_unfinished_draft check (state = 'draft' or not unfinished)
  `.execute(db);
}
