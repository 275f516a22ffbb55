import { sql } from "kysely";
import type { Db } from "@/db/executor";
import type { LayoutDocument } from "@/schemas/documents/layout";

/** The layout of each package. */
export async function listLayoutsOfPackages(
  db: Db,
  packageIds: readonly string[],
): Promise<{ packageId: string; layoutId: string; document: LayoutDocument }[]> {
  const rows = await db
    .selectFrom("package")
    .innerJoin("layout", "layout.id", "package.layoutId")
    .select(["package.id as packageId", "layout.id as layoutId", "layout.document"])
    .where(sql<boolean>`package.id = any(${packageIds as string[]}::uuid[])`)
    .execute();
  return rows.map((row) => ({ ...row, document: row.document as unknown as LayoutDocument }));
}

/** Published and retired layouts of all families, newest first: what a dump of unknown origin may have been written with. */
export async function listLayoutsInUse(
  db: Db,
): Promise<{ layoutId: string; familyId: string; document: LayoutDocument }[]> {
  const rows = await db
    .selectFrom("layout")
    .select(["id as layoutId", "familyId", "document"])
    .where("state", "in", ["published", "retired"])
    .orderBy("id", "desc")
    .execute();
  return rows.map((row) => ({ ...row, document: row.document as unknown as LayoutDocument }));
}
