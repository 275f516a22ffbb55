import { type Selectable, sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { FamilyRevision } from "@/db/generated/types.generated";
import { isUuid } from "@/db/queries/code-or-id";
import { AppError } from "@/lib/errors";
import type { FamilyDocument, PublishState } from "@/schemas/api/families";

export interface FamilyRow {
  id: string;
  code: string;
  createdAt: Date;
  createdBy: string;
}

const familyColumns = ["id", "code", "createdAt", "createdBy"] as const;

/** A family by its code (any case) or UUID. @throws AppError `family.not_found` */
export async function getFamily(db: Db, codeOrId: string): Promise<FamilyRow> {
  return db
    .selectFrom("family")
    .select(familyColumns)
    .where(isUuid(codeOrId) ? "id" : "code", "=", isUuid(codeOrId) ? codeOrId : codeOrId.trim().toUpperCase())
    .executeTakeFirstOrThrow(() => notFound(codeOrId));
}

/** A family, locked until commit: numbers of revisions and versions of layouts are given under this lock. @throws AppError `family.not_found` */
export async function lockFamily(trx: Trx, id: string): Promise<FamilyRow> {
  return trx
    .selectFrom("family")
    .select(familyColumns)
    .where("id", "=", id)
    .forUpdate()
    .executeTakeFirstOrThrow(() => notFound(id));
}

const notFound = (family: string) =>
  new AppError("family.not_found", { family, message: `There is no family ${family}.` });

export async function insertFamily(trx: Trx, family: FamilyRow): Promise<void> {
  await trx.insertInto("family").values(family).execute();
}

export interface FamilySummaryRow extends FamilyRow {
  document: FamilyDocument;
  newestRevision: number;
  state: PublishState;
  /** Newest published revision, null where there is none. */
  revision: number | null;
  layouts: number;
  lots: number;
}

/** Families by code, each with its newest revision (of any state) and counts. */
export async function listFamilies(
  db: Db,
  { after, limit, id }: { after?: string; limit: number; id?: string },
): Promise<FamilySummaryRow[]> {
  const rows = await db
    .selectFrom("family")
    .innerJoinLateral(
      (eb) =>
        eb
          .selectFrom("familyRevision")
          .select(["document", "number as newestRevision", "state"])
          .whereRef("familyRevision.familyId", "=", "family.id")
          .orderBy("number", "desc")
          .limit(1)
          .as("newest"),
      (join) => join.onTrue(),
    )
    .select(["family.id", "family.code", "family.createdAt", "family.createdBy"])
    .select(["newest.document", "newest.newestRevision", "newest.state"])
    .select((eb) => [
      eb
        .selectFrom("familyRevision")
        .select((e) => e.fn.max("number").as("number"))
        .whereRef("familyRevision.familyId", "=", "family.id")
        .where("state", "=", "published")
        .as("revision"),
      eb
        .selectFrom("layout")
        .select(sql<number>`count(*)::int`.as("count"))
        .whereRef("layout.familyId", "=", "family.id")
        .where("state", "=", "published")
        .as("layouts"),
      eb
        .selectFrom("lot")
        .select(sql<number>`count(*)::int`.as("count"))
        .whereRef("lot.familyId", "=", "family.id")
        .as("lots"),
    ])
    .$if(after !== undefined, (query) => query.where("family.code", ">", after as string))
    .$if(id !== undefined, (query) => query.where("family.id", "=", id as string))
    .orderBy("family.code")
    .limit(limit)
    .execute();
  return rows.map((row) => ({
    ...row,
    document: row.document as unknown as FamilyDocument,
    state: row.state as PublishState,
    layouts: row.layouts ?? 0,
    lots: row.lots ?? 0,
  }));
}

export interface FamilyRevisionRow {
  id: string;
  familyId: string;
  number: number;
  state: PublishState;
  document: FamilyDocument;
  /** SHA-256 of the RFC 8785 form of the document. */
  sha256: Buffer;
  createdAt: Date;
  createdBy: string;
  submittedAt: Date | null;
  submittedBy: string | null;
  publishedAt: Date | null;
  retiredAt: Date | null;
}

const revisionColumns = [
  "id",
  "familyId",
  "number",
  "state",
  "document",
  "sha256",
  "createdAt",
  "createdBy",
  "submittedAt",
  "submittedBy",
  "publishedAt",
  "retiredAt",
] as const;

function rowOf(row: Pick<Selectable<FamilyRevision>, (typeof revisionColumns)[number]>): FamilyRevisionRow {
  return { ...row, state: row.state as PublishState, document: row.document as unknown as FamilyDocument };
}

/** A revision by its UUID. @throws AppError `family-revision.not_found` */
export async function getFamilyRevision(db: Db, id: string): Promise<FamilyRevisionRow> {
  const row = await db
    .selectFrom("familyRevision")
    .select(revisionColumns)
    .where("id", "=", id)
    .executeTakeFirstOrThrow(() => revisionNotFound(id));
  return rowOf(row);
}

/** A family's revision by its number, locked until commit. @throws AppError `family-revision.not_found` */
export async function lockFamilyRevision(trx: Trx, familyId: string, number: number): Promise<FamilyRevisionRow> {
  const row = await trx
    .selectFrom("familyRevision")
    .select(revisionColumns)
    .where("familyId", "=", familyId)
    .where("number", "=", number)
    .forUpdate()
    .executeTakeFirstOrThrow(() => revisionNotFound(String(number)));
  return rowOf(row);
}

const revisionNotFound = (revision: string) =>
  new AppError("family-revision.not_found", { revision, message: `The family has no revision ${revision}.` });

/** A family's revisions, newest first. */
export async function listFamilyRevisions(db: Db, familyId: string): Promise<FamilyRevisionRow[]> {
  const rows = await db
    .selectFrom("familyRevision")
    .select(revisionColumns)
    .where("familyId", "=", familyId)
    .orderBy("number", "desc")
    .execute();
  return rows.map(rowOf);
}

/** The published revision with the highest number; undefined where none is published. */
export async function findNewestPublishedRevision(db: Db, familyId: string): Promise<FamilyRevisionRow | undefined> {
  const row = await db
    .selectFrom("familyRevision")
    .select(revisionColumns)
    .where("familyId", "=", familyId)
    .where("state", "=", "published")
    .orderBy("number", "desc")
    .limit(1)
    .executeTakeFirst();
  return row && rowOf(row);
}

export type NewFamilyRevision = Pick<
  FamilyRevisionRow,
  "id" | "familyId" | "number" | "document" | "sha256" | "createdAt" | "createdBy"
>;

/** Adds a revision as a draft. */
export async function insertFamilyRevision(trx: Trx, revision: NewFamilyRevision): Promise<void> {
  await trx
    .insertInto("familyRevision")
    .values({ ...revision, state: "draft", document: JSON.stringify(revision.document) })
    .execute();
}

export type RevisionChange = Partial<
  Pick<FamilyRevisionRow, "state" | "submittedAt" | "submittedBy" | "publishedAt" | "retiredAt">
>;

/** Moves a revision to another state; the database refuses moves that are none. */
export async function updateFamilyRevision(trx: Trx, id: string, change: RevisionChange): Promise<void> {
  await trx.updateTable("familyRevision").set(change).where("id", "=", id).execute();
}
