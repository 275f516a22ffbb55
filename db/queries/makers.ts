import type { Db, Trx } from "@/db/executor";

export type MakerSubject = "family-revision" | "layout" | "derivation" | "package";
export type MakerAct = "wrote" | "uploaded" | "derived" | "excluded" | "imported" | "built" | "submitted";

export interface NewMaker {
  id: string;
  subjectKind: MakerSubject;
  subjectId: string;
  personId: string;
  act: MakerAct;
  at: Date;
}

/** Adds evidence of who made something; it can't be taken back, and a package's is frozen at submit. */
export async function insertMakers(trx: Trx, makers: readonly NewMaker[]): Promise<void> {
  if (makers.length > 0)
    await trx
      .insertInto("maker")
      .values([...makers])
      .execute();
}

export interface MakerRow {
  personId: string;
  name: string;
  act: string;
  at: Date;
}

/** Everyone who touched a subject and how, oldest first. */
export function listMakers(db: Db, subjectKind: MakerSubject, subjectId: string): Promise<MakerRow[]> {
  return db
    .selectFrom("maker")
    .innerJoin("person", "person.id", "maker.personId")
    .select(["maker.personId", "person.name", "maker.act", "maker.at"])
    .where("maker.subjectKind", "=", subjectKind)
    .where("maker.subjectId", "=", subjectId)
    .orderBy("maker.at")
    .execute();
}
