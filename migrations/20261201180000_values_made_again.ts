import { type Kysely, sql } from "kysely";

/**
 * A package's `images.jsonl` is made again from its images whenever it is asked for, and so no longer stored: of a lot of 50,000
 * devices it has 100 MB. What a bundle needs before its bytes is stored in its place. Rows from before keep their content.
 * What is stored is not compressed from now on, so that a part of it can be read without the whole.
 */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    alter table package_file
      alter column content drop not null,
      alter column content set storage external,
      add column byte_count integer,
      add column crc32 bigint,
      add constraint package_file_told check (content is not null or (byte_count is not null and crc32 is not null));
  `.execute(db);
}
