import type { Db, Trx } from "@/db/executor";
import type { ReadingMapping } from "@/lib/domain/readings/map-table";

export interface ReadingMappingRow {
  mapping: ReadingMapping;
  updatedAt: Date;
  updatedByName: string;
}

/** The column mapping last accepted for a family, undefined where there is none. */
export async function findReadingMapping(db: Db, familyId: string): Promise<ReadingMappingRow | undefined> {
  const row = await db
    .selectFrom("readingMapping")
    .innerJoin("person", "person.id", "readingMapping.updatedBy")
    .select(["readingMapping.mapping", "readingMapping.updatedAt", "person.name as updatedByName"])
    .where("readingMapping.familyId", "=", familyId)
    .executeTakeFirst();
  return row && { ...row, mapping: row.mapping as unknown as ReadingMapping };
}

/** Keeps a family's mapping in place of the one before. */
export async function keepReadingMapping(
  trx: Trx,
  { mapping, ...row }: { familyId: string; mapping: ReadingMapping; updatedAt: Date; updatedBy: string },
): Promise<void> {
  const values = { ...row, mapping: JSON.stringify(mapping) };
  const { familyId: _, ...change } = values;
  await trx
    .insertInto("readingMapping")
    .values(values)
    .onConflict((conflict) => conflict.column("familyId").doUpdateSet(change))
    .execute();
}
