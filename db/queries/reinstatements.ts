import type { Db, Trx } from "@/db/executor";
import { AppError } from "@/lib/errors";

export interface NewReinstatement {
  id: string;
  lotId: string;
  packageId: string;
  reason: string;
  askedBy: string;
  askedAt: Date;
}

const columns = [
  "reinstatement.id",
  "reinstatement.lotId",
  "lot.code as lotCode",
  "reinstatement.packageId",
  "package.version",
  "reinstatement.reason",
  "reinstatement.state",
  "reinstatement.askedBy",
  "person.name as askedByName",
  "reinstatement.askedAt",
  "reinstatement.decidedAt",
] as const;

const withNames = (db: Db) =>
  db
    .selectFrom("reinstatement")
    .innerJoin("lot", "lot.id", "reinstatement.lotId")
    .innerJoin("package", "package.id", "reinstatement.packageId")
    .innerJoin("person", "person.id", "reinstatement.askedBy")
    .select(columns);

export interface ReinstatementRow extends NewReinstatement {
  lotCode: string;
  version: string;
  state: string;
  askedByName: string;
  decidedAt: Date | null;
}

/** Asks for an earlier release. @throws `reinstatement.exists` where one is open for the lot */
export async function insertReinstatement(trx: Trx, row: NewReinstatement): Promise<void> {
  await trx
    .insertInto("reinstatement")
    .values({ ...row, state: "asked" })
    .execute();
}

const notFound = (id: string) => () =>
  new AppError("reinstatement.not_found", { id, message: "There is no such request." });

/** A reinstatement. @throws AppError `reinstatement.not_found` */
export function getReinstatement(db: Db, id: string): Promise<ReinstatementRow> {
  return withNames(db).where("reinstatement.id", "=", id).executeTakeFirstOrThrow(notFound(id));
}

/** A reinstatement, locked until commit. @throws AppError `reinstatement.not_found` */
export function lockReinstatement(trx: Trx, id: string): Promise<ReinstatementRow> {
  return withNames(trx)
    .where("reinstatement.id", "=", id)
    .forUpdate(["reinstatement"])
    .executeTakeFirstOrThrow(notFound(id));
}

/** Reinstatements of a lot, newest first, older than the cursor's id. */
export function listReinstatements(
  db: Db,
  lotId: string,
  page: { limit: number; cursor?: string },
): Promise<ReinstatementRow[]> {
  let query = withNames(db)
    .where("reinstatement.lotId", "=", lotId)
    .orderBy("reinstatement.id", "desc")
    .limit(page.limit);
  if (page.cursor !== undefined) query = query.where("reinstatement.id", "<", page.cursor);
  return query.execute();
}

/** Ends a locked request. */
export async function finishReinstatement(trx: Trx, id: string, state: "done" | "refused", at: Date): Promise<void> {
  await trx.updateTable("reinstatement").set({ state, decidedAt: at }).where("id", "=", id).execute();
}
