import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import type { Trx } from "@/db/executor";
import { insertApproval } from "@/db/queries/approvals";
import { insertFamily } from "@/db/queries/families";
import { deleteLayout, getLayout, insertLayout, updateLayout } from "@/db/queries/layouts";
import { insertMakers } from "@/db/queries/makers";
import { documentDigest } from "@/lib/services/families/document-digest";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertPerson } from "../support/people-rows";
import { firstGolden } from "../support/scenario/golden";

let database: TestDatabase;
let writer: string;
let reviewer: string;
const familyId = uuidv7();
const at = new Date();
const { layout: source } = firstGolden();

beforeAll(async () => {
  database = await openTestDatabase();
  writer = await insertPerson(database.owner, "writer", "engineer", "reviewer");
  reviewer = await insertPerson(database.owner, "reader", "reviewer");
  await inTransaction((trx) => insertFamily(trx, { id: familyId, code: "MW-20", createdAt: at, createdBy: writer }));
});

const inTransaction = <T>(work: (trx: Trx) => Promise<T>) => database.db.transaction().execute(work);

function layoutOf(version: string) {
  const document = { ...(JSON.parse(source) as LayoutDocument), version };
  const made = { createdAt: at, createdBy: writer, updatedAt: at, updatedBy: writer };
  return {
    id: uuidv7(),
    familyId,
    version,
    source,
    document,
    sha256: documentDigest(document),
    draftNumber: 1,
    step: null,
    ...made,
  };
}

async function draft(version: string) {
  const layout = layoutOf(version);
  await inTransaction(async (trx) => {
    await insertLayout(trx, layout);
    await insertMakers(trx, [
      { id: uuidv7(), subjectKind: "layout", subjectId: layout.id, personId: writer, act: "wrote", at },
    ]);
  });
  return layout;
}

const move = (id: string, change: Parameters<typeof updateLayout>[2]) =>
  inTransaction((trx) => updateLayout(trx, id, change));

const approve = (layout: { id: string; sha256: Buffer }, personId: string) =>
  inTransaction((trx) =>
    insertApproval(trx, {
      id: uuidv7(),
      subjectKind: "layout",
      subjectId: layout.id,
      decision: "approve",
      personId,
      personName: "anyone",
      meaning: "published",
      reason: null,
      digest: layout.sha256,
      serialCount: null,
      at,
    }),
  );

describe("a layout in the database", () => {
  it("comes back as written: key order, numbers and text", async () => {
    await draft("1.0.0");
    const stored = await getLayout(database.db, familyId, "1.0.0");
    expect(stored.document).toEqual(JSON.parse(source));
    expect(documentDigest(stored.document)).toEqual(stored.sha256);
    expect(stored.source).toBe(source);
  });

  it("has its version once in its family", async () => {
    await draft("1.1.0");
    const again = inTransaction((trx) => insertLayout(trx, layoutOf("1.1.0")));
    await expect(again).rejects.toMatchObject({ constraint: "layout_version_unique" });
  });

  it("begins as a draft", async () => {
    const layout = layoutOf("1.2.0");
    const born = database.db
      .insertInto("layout")
      .values({ ...layout, state: "published", document: JSON.stringify(layout.document) })
      .execute();
    await expect(born).rejects.toMatchObject({ message: "layout.wrong_state" });
  });

  it("takes a decision from a second person only, over these bytes only", async () => {
    const layout = await draft("1.3.0");
    await move(layout.id, { state: "in-review" });
    await expect(approve(layout, writer)).rejects.toMatchObject({ message: "layout.self_approval" });
    await expect(approve({ ...layout, sha256: Buffer.alloc(32) }, reviewer)).rejects.toMatchObject({
      message: "layout.changed",
    });
    await expect(move(layout.id, { state: "published" })).rejects.toMatchObject({ message: "layout.not_approved" });
    await approve(layout, reviewer);
    await move(layout.id, { state: "published", publishedAt: at });
    const other = layoutOf("9.9.9");
    await expect(move(layout.id, { document: other.document, sha256: other.sha256 })).rejects.toMatchObject({
      message: "layout.wrong_state",
    });
    await expect(inTransaction((trx) => deleteLayout(trx, layout.id))).rejects.toMatchObject({
      message: "layout.wrong_state",
    });
    await move(layout.id, { state: "retired", retiredAt: at });
    await expect(move(layout.id, { state: "published" })).rejects.toMatchObject({ message: "layout.wrong_state" });
  });

  it("is unfinished as a draft only: nothing with errors in its text is decided over", async () => {
    const layout = await draft("1.5.0");
    await move(layout.id, { source: "{", unfinished: true });
    await expect(move(layout.id, { state: "in-review" })).rejects.toMatchObject({
      constraint: "layout_unfinished_draft",
    });
    await move(layout.id, { source, unfinished: false });
    await move(layout.id, { state: "in-review" });
    await expect(move(layout.id, { unfinished: true })).rejects.toMatchObject({ message: "layout.wrong_state" });
  });

  it("is deleted as a draft, not under review", async () => {
    const layout = await draft("1.4.0");
    await move(layout.id, { state: "in-review" });
    await expect(inTransaction((trx) => deleteLayout(trx, layout.id))).rejects.toMatchObject({
      message: "layout.wrong_state",
    });
    await move(layout.id, { state: "draft" });
    await inTransaction((trx) => deleteLayout(trx, layout.id));
    await expect(getLayout(database.db, familyId, "1.4.0")).rejects.toMatchObject({ code: "layout.not_found" });
  });
});
