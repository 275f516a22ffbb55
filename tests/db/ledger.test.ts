import { createHash } from "node:crypto";
import { sql } from "kysely";
import { beforeAll, describe, expect, it } from "vitest";
import { findLedgerHead } from "@/db/queries/ledger";
import { openTestDatabase, type TestDatabase } from "../support/database";

let database: TestDatabase;
beforeAll(async () => {
  database = await openTestDatabase();
});

const ZEROS = Buffer.alloc(32);
const sha256 = (text: string) => createHash("sha256").update(text).digest();
const event = (seq: number, previous: Buffer, more: { canonical?: string; hash?: Buffer } = {}) => {
  const canonical = more.canonical ?? `{"seq":${seq}}`;
  const hash = more.hash ?? sha256(canonical);
  return { seq, at: new Date(), actor: "system", action: "thing.noted", subject: "A", canonical, previous, hash };
};
const insert = (row: ReturnType<typeof event>) => database.db.insertInto("ledgerEvent").values(row).execute();
const headHash = async () => (await findLedgerHead(database.db))?.hash ?? ZEROS;
const nextSeq = async () => ((await findLedgerHead(database.db))?.seq ?? 0) + 1;

describe("the chain as the database keeps it", () => {
  it("begins at 1 with zeros before it", async () => {
    await expect(insert(event(2, ZEROS))).rejects.toMatchObject({ message: "ledger.chain_broken" });
    await expect(insert(event(1, sha256("x")))).rejects.toMatchObject({ message: "ledger.chain_broken" });
    await insert(event(1, ZEROS));
    expect((await findLedgerHead(database.db))?.seq).toBe(1);
  });

  it("leaves no place out, uses none twice and names the hash before", async () => {
    const [seq, head] = [await nextSeq(), await headHash()];
    await expect(insert(event(seq + 1, head))).rejects.toMatchObject({ message: "ledger.chain_broken" });
    await expect(insert(event(seq - 1, head))).rejects.toMatchObject({ message: "ledger.chain_broken" });
    await expect(insert(event(seq, ZEROS))).rejects.toMatchObject({ message: "ledger.chain_broken" });
    await insert(event(seq, head));
    expect(await nextSeq()).toBe(seq + 1);
  });

  it("takes no hash but the text's own, whatever characters are in it", async () => {
    const [seq, head] = [await nextSeq(), await headHash()];
    await expect(insert(event(seq, head, { hash: sha256("another text") }))).rejects.toMatchObject({
      message: "ledger.hash_wrong",
    });
    await insert(event(seq, head, { canonical: `{"ä":"\\\\ € 😀","seq":${seq}}` }));
    expect(await nextSeq()).toBe(seq + 1);
  });

  it("lets one of two at once have a place", async () => {
    const [seq, head] = [await nextSeq(), await headHash()];
    const both = await Promise.allSettled([
      insert(event(seq, head)),
      insert(event(seq, head, { canonical: '{"b":1}' })),
    ]);
    expect(both.map((result) => result.status).sort()).toEqual(["fulfilled", "rejected"]);
    expect(await nextSeq()).toBe(seq + 1);
  });

  it("does not let the owner put an event between others either, its guard being a trigger", async () => {
    const row = event(1, ZEROS);
    await expect(database.owner.insertInto("ledgerEvent").values(row).execute()).rejects.toMatchObject({
      message: "ledger.chain_broken",
    });
  });
});

describe("a text beside the chain", () => {
  it("belongs to an event, once by name", async () => {
    const text = (seq: number) => sql`insert into ledger_text values (${seq}, 'reason', '\\x00', 'said')`;
    await text(1).execute(database.db);
    await expect(text(1).execute(database.db)).rejects.toMatchObject({ code: "23505" });
    await expect(text(9_999).execute(database.db)).rejects.toMatchObject({ code: "23503" });
  });
});
