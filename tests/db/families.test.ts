import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { insertApproval } from "@/db/queries/approvals";
import { insertFamily, insertFamilyRevision, updateFamilyRevision } from "@/db/queries/families";
import { insertMakers } from "@/db/queries/makers";
import { documentDigest } from "@/lib/services/families/document-digest";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertPerson } from "../support/people-rows";
import { firstGolden } from "../support/scenario/golden";

let database: TestDatabase;
let writer: string;
let reviewer: string;
const document = firstGolden().family;
const sha256 = documentDigest(document);
const at = new Date();

beforeAll(async () => {
  database = await openTestDatabase();
  writer = await insertPerson(database.owner, "writer", "engineer", "reviewer");
  reviewer = await insertPerson(database.owner, "reader", "reviewer");
});

const inTransaction = <T>(work: (trx: Parameters<typeof insertFamily>[0]) => Promise<T>) =>
  database.db.transaction().execute(work);

/** A family of its own with a draft that `writer` wrote. */
async function draft(code: string): Promise<string> {
  const familyId = uuidv7();
  const id = uuidv7();
  await inTransaction(async (trx) => {
    await insertFamily(trx, { id: familyId, code, createdAt: at, createdBy: writer });
    await insertFamilyRevision(trx, { id, familyId, number: 1, document, sha256, createdAt: at, createdBy: writer });
    await insertMakers(trx, [
      { id: uuidv7(), subjectKind: "family-revision", subjectId: id, personId: writer, act: "wrote", at },
    ]);
  });
  return id;
}

const submit = (id: string) =>
  inTransaction((trx) => updateFamilyRevision(trx, id, { state: "in-review", submittedAt: at, submittedBy: writer }));

const approve = (subjectId: string, personId: string, digest = sha256) =>
  inTransaction((trx) =>
    insertApproval(trx, {
      id: uuidv7(),
      subjectKind: "family-revision",
      subjectId,
      decision: "approve",
      personId,
      personName: "anyone",
      meaning: "published",
      reason: null,
      digest,
      serialCount: null,
      at,
    }),
  );

describe("a family revision in the database", () => {
  it("is refused its writer's approval, be they a reviewer or not", async () => {
    const id = await draft("SELF");
    await submit(id);
    await expect(approve(id, writer)).rejects.toMatchObject({ code: "TW001", message: "family.self_approval" });
  });

  it("is refused an approval over other values, and one of a draft", async () => {
    const id = await draft("OTHER");
    await expect(approve(id, reviewer)).rejects.toMatchObject({ message: "family.wrong_state" });
    await submit(id);
    await expect(approve(id, reviewer, Buffer.alloc(32))).rejects.toMatchObject({ message: "family.changed" });
  });

  it("is published by nobody without an approval", async () => {
    const id = await draft("UNSIGNED");
    await submit(id);
    const publish = inTransaction((trx) => updateFamilyRevision(trx, id, { state: "published", publishedAt: at }));
    await expect(publish).rejects.toMatchObject({ message: "family.not_approved" });
  });

  it("is frozen from review on, and goes no way back from published", async () => {
    const id = await draft("FROZEN");
    await submit(id);
    const change = () =>
      database.db
        .updateTable("familyRevision")
        .set({ document: JSON.stringify({ ...document, capacityKg: 30 }) })
        .where("id", "=", id)
        .execute();
    await expect(change()).rejects.toMatchObject({ message: "family.wrong_state" });
    await approve(id, reviewer);
    await inTransaction((trx) => updateFamilyRevision(trx, id, { state: "published", publishedAt: at }));
    await expect(change()).rejects.toMatchObject({ message: "family.wrong_state" });
    const back = inTransaction((trx) => updateFamilyRevision(trx, id, { state: "draft" }));
    await expect(back).rejects.toMatchObject({ message: "family.wrong_state" });
  });

  it("keeps its evidence: makers and approvals can't be changed or removed", async () => {
    await draft("EVIDENCE");
    await expect(database.owner.deleteFrom("maker").execute()).rejects.toMatchObject({
      message: "database.append_only",
    });
    await expect(database.db.deleteFrom("maker").execute()).rejects.toMatchObject({ code: "42501" });
    await expect(database.db.updateTable("maker").set({ personId: reviewer }).execute()).rejects.toMatchObject({
      code: "42501",
    });
  });

  it("has its number once", async () => {
    const id = await draft("NUMBERED");
    const { familyId } = await database.db
      .selectFrom("familyRevision")
      .select("familyId")
      .where("id", "=", id)
      .executeTakeFirstOrThrow();
    const again = inTransaction((trx) =>
      insertFamilyRevision(trx, {
        id: uuidv7(),
        familyId,
        number: 1,
        document,
        sha256,
        createdAt: at,
        createdBy: writer,
      }),
    );
    await expect(again).rejects.toMatchObject({ constraint: "family_revision_number_unique" });
  });
});
