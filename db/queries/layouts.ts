import { type Selectable, sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { Layout } from "@/db/generated/types.generated";
import { isUuid } from "@/db/queries/code-or-id";
import { AppError } from "@/lib/errors";
import type { PublishState } from "@/schemas/api/families";
import type { LayoutDocument } from "@/schemas/documents/layout";

export interface LayoutRow {
  id: string;
  familyId: string;
  version: string;
  state: PublishState;
  /** The author's own text, comments in it or not; what is hashed and built from is the document. */
  source: string;
  document: LayoutDocument;
  /** SHA-256 of the RFC 8785 form of the document. */
  sha256: Buffer;
  /** Rises with every save, so that two editors notice each other. */
  draftNumber: number;
  /** The text has moved on from the document: it has errors, or is no JSON yet. Drafts only. */
  unfinished: boolean;
  /** Computed step against the newest published lower version; null where there is none. */
  step: string | null;
  createdAt: Date;
  createdBy: string;
  updatedAt: Date;
  updatedBy: string;
  submittedAt: Date | null;
  submittedBy: string | null;
  publishedAt: Date | null;
  retiredAt: Date | null;
}

const layoutColumns = [
  "id",
  "familyId",
  "version",
  "state",
  "source",
  "document",
  "sha256",
  "draftNumber",
  "unfinished",
  "step",
  "createdAt",
  "createdBy",
  "updatedAt",
  "updatedBy",
  "submittedAt",
  "submittedBy",
  "publishedAt",
  "retiredAt",
] as const;

function rowOf(row: Pick<Selectable<Layout>, (typeof layoutColumns)[number]>): LayoutRow {
  return { ...row, state: row.state as PublishState, document: row.document as unknown as LayoutDocument };
}

const notFound = (layout: string) =>
  new AppError("layout.not_found", { layout, message: `The family has no layout ${layout}.` });

/** A family's layout by its version. @throws AppError `layout.not_found` */
export async function getLayout(db: Db, familyId: string, version: string): Promise<LayoutRow> {
  const row = await db
    .selectFrom("layout")
    .select(layoutColumns)
    .where("familyId", "=", familyId)
    .where("version", "=", version)
    .executeTakeFirstOrThrow(() => notFound(version));
  return rowOf(row);
}

/** Who wrote a layout's text last and who asked for its publishing. */
export interface StoredTextRow
  extends Pick<LayoutRow, "state" | "draftNumber" | "unfinished" | "updatedAt" | "submittedAt"> {
  /** Null where the draft that was known still stands. */
  source: string | null;
  updatedByName: string;
  submittedByName: string | null;
}

/**
 * A layout's text as it is stored now, without its document, and without the text where that is known.
 * @param known number of the draft whose text is known.
 * @throws AppError `layout.not_found`
 */
export async function getStoredText(
  db: Db,
  familyId: string,
  version: string,
  known: number | undefined,
): Promise<StoredTextRow> {
  const row = await db
    .selectFrom("layout")
    .innerJoin("person as writer", "writer.id", "layout.updatedBy")
    .leftJoin("person as asker", "asker.id", "layout.submittedBy")
    .select((eb) => [
      "layout.state",
      "layout.draftNumber",
      "layout.unfinished",
      "layout.updatedAt",
      "layout.submittedAt",
      eb
        .case()
        .when("layout.draftNumber", "=", known ?? 0)
        .then(null)
        .else(eb.ref("layout.source"))
        .end()
        .as("source"),
      "writer.name as updatedByName",
      "asker.name as submittedByName",
    ])
    .where("layout.familyId", "=", familyId)
    .where("layout.version", "=", version)
    .executeTakeFirstOrThrow(() => notFound(version));
  return { ...row, state: row.state as PublishState };
}

/** A layout by its UUID. @throws AppError `layout.not_found` */
export async function getLayoutById(db: Db, id: string): Promise<LayoutRow> {
  if (!isUuid(id)) throw notFound(id);
  const row = await db
    .selectFrom("layout")
    .select(layoutColumns)
    .where("id", "=", id)
    .executeTakeFirstOrThrow(() => notFound(id));
  return rowOf(row);
}

/** A family's layout, locked until commit. @throws AppError `layout.not_found` */
export async function lockLayout(trx: Trx, familyId: string, version: string): Promise<LayoutRow> {
  const row = await trx
    .selectFrom("layout")
    .select(layoutColumns)
    .where("familyId", "=", familyId)
    .where("version", "=", version)
    .forUpdate()
    .executeTakeFirstOrThrow(() => notFound(version));
  return rowOf(row);
}

/** A family's layouts, the newest written first. */
export async function listLayouts(
  db: Db,
  familyId: string,
  { before, limit }: { before?: string; limit?: number } = {},
): Promise<LayoutRow[]> {
  const rows = await db
    .selectFrom("layout")
    .select(layoutColumns)
    .where("familyId", "=", familyId)
    .$if(before !== undefined, (query) => query.where("id", "<", before as string))
    .orderBy("id", "desc")
    .$if(limit !== undefined, (query) => query.limit(limit as number))
    .execute();
  return rows.map(rowOf);
}

/** Documents of a family's layouts that were published, retired ones among them. */
export async function listPublishedLayoutDocuments(db: Db, familyId: string): Promise<LayoutDocument[]> {
  const rows = await db
    .selectFrom("layout")
    .select("document")
    .where("familyId", "=", familyId)
    .where("state", "in", ["published", "retired"])
    .execute();
  return rows.map((row) => row.document as unknown as LayoutDocument);
}

export type NewLayout = Omit<
  LayoutRow,
  "state" | "unfinished" | "submittedAt" | "submittedBy" | "publishedAt" | "retiredAt"
>;

/** Adds a layout as a draft. @throws constraint `layout_version_unique` → `layout.exists` */
export async function insertLayout(trx: Trx, layout: NewLayout): Promise<void> {
  await trx
    .insertInto("layout")
    .values({ ...layout, state: "draft", document: JSON.stringify(layout.document) })
    .execute();
}

export type LayoutChange = Partial<Omit<LayoutRow, "id" | "familyId" | "createdAt" | "createdBy">>;

/** Changes a draft or moves a layout to another state; the database refuses what isn't allowed. */
export async function updateLayout(trx: Trx, id: string, change: LayoutChange): Promise<void> {
  const { document, ...rest } = change;
  await trx
    .updateTable("layout")
    .set(document === undefined ? rest : { ...rest, document: JSON.stringify(document) })
    .where("id", "=", id)
    .execute();
}

export async function deleteLayout(trx: Trx, id: string): Promise<void> {
  await trx.deleteFrom("layout").where("id", "=", id).execute();
}

/** What of one lot was built from one layout. */
export interface LayoutUseRow {
  layoutId: string;
  lot: string;
  firmware: string;
  packages: number;
  /** The package of the lot that is live and built from this layout. */
  liveId: string | null;
  liveVersion: string | null;
  /** Packages under way: building, draft, in review or approved. */
  underWay: number;
}

/** Lots with packages from a family's layouts, by layout and lot code; packages that failed don't count. */
export async function listLayoutUses(
  db: Db,
  familyId: string,
  options: { layoutId?: string; after?: string; limit?: number } = {},
): Promise<LayoutUseRow[]> {
  const { layoutId, after, limit } = options;
  return db
    .selectFrom("package")
    .innerJoin("lot", "lot.id", "package.lotId")
    .where("lot.familyId", "=", familyId)
    .where("package.state", "!=", "failed")
    .$if(layoutId !== undefined, (query) => query.where("package.layoutId", "=", layoutId as string))
    .$if(after !== undefined, (query) => query.where("lot.code", ">", after as string))
    .select([
      "package.layoutId",
      "lot.code as lot",
      "lot.firmware",
      sql<number>`count(*)::int`.as("packages"),
      sql<string | null>`(array_agg(package.id) filter (where package.state = 'live'))[1]`.as("liveId"),
      sql<string | null>`(array_agg(package.version) filter (where package.state = 'live'))[1]`.as("liveVersion"),
      sql<number>`count(*) filter (where package.state in ('building','draft','in-review','approved'))::int`.as(
        "underWay",
      ),
    ])
    .groupBy(["package.layoutId", "lot.code", "lot.firmware"])
    .orderBy("lot.code")
    .$if(limit !== undefined, (query) => query.limit(limit as number))
    .execute();
}
