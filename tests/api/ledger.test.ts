import { createHash } from "node:crypto";
import { sql } from "kysely";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { canonicalJson } from "@/lib/domain/canonical-json";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { openTestApi, type TestApi } from "../support/api";
import { insertMadeUpRow } from "../support/made-up-row";

let api: TestApi;

beforeAll(async () => {
  api = await openTestApi();
});
afterAll(() => api.close());

const get = (path: string, query: Record<string, string | number> = {}) =>
  api.call("GET", path, { as: "auditor", query });
const append = (subject: string, texts: Record<string, string> = {}, action = "thing.noted") => {
  const ctx = api.ctx("engineer");
  return ctx.db.transaction().execute((trx) => appendEvent(ctx, trx, { action, subject, data: { n: 1.5e-7 }, texts }));
};
const sha256 = (text: string) => createHash("sha256").update(text).digest("hex");
const ZEROS = "0".repeat(64);

/** Changes rows as somebody who owns the database and switched its guards off, runs the check, and puts everything back. */
async function tampered<T>(change: string, check: () => Promise<T>): Promise<T> {
  const guards = async (word: "disable" | "enable") => {
    await sql.raw(`alter table ledger_event ${word} trigger user`).execute(api.owner);
    await sql.raw(`alter table ledger_text ${word} trigger user`).execute(api.owner);
  };
  await sql`create table kept_event as select * from ledger_event`.execute(api.owner);
  await sql`create table kept_text as select * from ledger_text`.execute(api.owner);
  await guards("disable");
  try {
    await sql.raw(change).execute(api.owner);
    return await check();
  } finally {
    await sql`delete from ledger_text`.execute(api.owner);
    await sql`delete from ledger_event`.execute(api.owner);
    await sql`insert into ledger_event select * from kept_event order by seq`.execute(api.owner);
    await sql`insert into ledger_text select * from kept_text`.execute(api.owner);
    await sql`drop table kept_event, kept_text`.execute(api.owner);
    await guards("enable");
  }
}

describe("an empty ledger", () => {
  it("holds, ends in zeros and exports nothing", async () => {
    expect((await get("/ledger")).body).toEqual({ items: [], next: null });
    expect((await get("/ledger/head")).body).toEqual({ seq: 0, at: null, hash: ZEROS });
    expect((await get("/ledger/verify")).body).toEqual({ ok: true, events: 0, head: ZEROS });
    const exported = await get("/ledger/export");
    expect([exported.status, exported.body]).toEqual([200, null]);
  });
});

describe("GET /ledger", () => {
  beforeAll(async () => {
    await append("A-1", { reason: "the first" });
    await append("A-1", {}, "thing.changed");
    await append("B-1", { reason: "another", detail: "more" });
  });

  it("gives events exactly as they are hashed, chained from zeros", async () => {
    const { items } = (await get("/ledger", { order: "asc" })).body;
    expect(items).toHaveLength(3);
    let previous = ZEROS;
    for (const { hash, ...content } of items) {
      expect(Object.keys(content).sort()).toEqual(["action", "actor", "at", "data", "previous", "seq", "subject"]);
      expect(content.previous).toBe(previous);
      expect(hash).toBe(sha256(canonicalJson(content)));
      previous = hash;
    }
    expect(items[0]).toMatchObject({ seq: 1, actor: api.people.engineer.id, action: "thing.noted", subject: "A-1" });
    expect((await get("/ledger/head")).body).toMatchObject({ seq: 3, hash: previous });
    expect((await get("/ledger/verify")).body).toEqual({ ok: true, events: 3, head: previous });
  });

  it("keeps names and texts out of the chain, and shows them to people beside it", async () => {
    const chain = JSON.stringify((await get("/ledger")).body);
    expect(chain).not.toContain("the first");
    expect(chain).not.toContain("@marram.example");
    const { items } = (await get("/ledger/entries", { subject: "B-1" })).body;
    expect(items[0]).toMatchObject({
      actorName: "engineer",
      texts: [
        { name: "detail", content: "more" },
        { name: "reason", content: "another" },
      ],
    });
  });

  it("is paged and filtered by subject, action, actor and time", async () => {
    const seqs = async (query: Record<string, string | number>) =>
      (await get("/ledger", query)).body.items.map((event: { seq: number }) => event.seq);
    expect(await seqs({})).toEqual([3, 2, 1]);
    expect(await seqs({ subject: "A-1" })).toEqual([2, 1]);
    expect(await seqs({ action: "thing.changed" })).toEqual([2]);
    expect(await seqs({ action: "thing." })).toEqual([3, 2, 1]);
    expect(await seqs({ actor: api.people.engineer.id })).toEqual([3, 2, 1]);
    expect(await seqs({ actor: "system" })).toEqual([]);
    const { at } = (await get("/ledger", { subject: "B-1" })).body.items[0];
    expect(await seqs({ from: at })).toContain(3);
    expect(await seqs({ to: "2020-01-01T00:00:00Z" })).toEqual([]);
    const first = (await get("/ledger", { limit: 2 })).body;
    expect(first.items.map((event: { seq: number }) => event.seq)).toEqual([3, 2]);
    const rest = (await get("/ledger", { limit: 2, cursor: first.next })).body;
    expect(rest).toMatchObject({ items: [{ seq: 1 }], next: null });
    expect(await seqs({ order: "asc", cursor: 1 })).toEqual([2, 3]);
  });

  it("answers 401, 403 and 422", async () => {
    for (const path of ["/ledger", "/ledger/entries", "/ledger/verify", "/ledger/head", "/ledger/export"]) {
      expect((await api.call("GET", path)).status).toBe(401);
      expect((await api.call("GET", path, { as: "operator" })).status).toBe(403);
      for (const as of ["auditor", "engineer", "reviewer", "service", "admin"] as const)
        expect((await api.call("GET", path, { as })).status).toBe(200);
    }
    for (const query of [
      { cursor: "x" },
      { cursor: -1 },
      { from: "yesterday" },
      { action: "%" },
      { order: "up" },
      { limit: 1001 },
    ] as Record<string, string | number>[])
      expect((await get("/ledger", query)).status).toBe(422);
  });
});

describe("GET /ledger/export", () => {
  it("gives the hashed bytes, a line an event, that verify by themselves", async () => {
    const { body, headers } = await get("/ledger/export");
    const lines = (body as Buffer).toString("utf8").trimEnd().split("\n");
    let previous = ZEROS;
    for (const line of lines) {
      expect(JSON.parse(line).previous).toBe(previous);
      previous = sha256(line);
    }
    expect(lines).toHaveLength((await get("/ledger/head")).body.seq);
    expect(headers.get("ledger-head")).toBe(previous);
    expect(headers.get("content-type")).toBe("application/x-ndjson");
  });

  it("goes over more than one page, and so does the check", async () => {
    const ctx = api.ctx("engineer");
    await ctx.db.transaction().execute(async (trx) => {
      for (let i = 0; i < 1_100; i++) await appendEvent(ctx, trx, { action: "thing.noted", subject: `MANY-${i}` });
    });
    const exported = await get("/ledger/export");
    expect((exported.body as Buffer).toString("utf8").split("\n")).toHaveLength(1_104);
    expect((await get("/ledger/verify")).body).toMatchObject({ ok: true, events: 1_103 });
  });
});

describe("two at once", () => {
  it("are chained one after the other", async () => {
    const before = (await get("/ledger/head")).body.seq;
    await Promise.all(Array.from({ length: 12 }, (_, i) => append(`RACE-${i}`)));
    expect((await get("/ledger/verify")).body).toMatchObject({ ok: true, events: before + 12 });
  });

  it("leave nothing where the work they note was rolled back", async () => {
    const before = (await get("/ledger/head")).body;
    const ctx = api.ctx("engineer");
    const work = ctx.db.transaction().execute(async (trx) => {
      await appendEvent(ctx, trx, { action: "thing.noted", subject: "UNDONE" });
      throw new Error("undone");
    });
    await expect(work).rejects.toThrow("undone");
    expect((await get("/ledger/head")).body).toEqual(before);
  });
});

describe("GET /ledger/verify after somebody with the owner's rights changed rows", () => {
  const verdict = async () => (await get("/ledger/verify")).body;

  it.each([
    [
      "a text that was hashed",
      2,
      "hash",
      "update ledger_event set canonical = replace(canonical, 'A-1', 'A-2') where seq = 2",
    ],
    [
      "a whole event with its hash",
      3,
      "previous",
      "update ledger_event set subject = 'A-2', canonical = replace(canonical, 'A-1', 'A-2'), hash = sha256(convert_to(replace(canonical, 'A-1', 'A-2'), 'UTF8')) where seq = 2",
    ],
    ["a column", 2, "content", "update ledger_event set subject = 'A-2' where seq = 2"],
    ["who did it", 1, "content", "update ledger_event set actor = 'system' where seq = 1"],
    ["the time", 3, "content", "update ledger_event set at = at + interval '1 second' where seq = 3"],
    [
      "the spelling",
      2,
      "content",
      "update ledger_event set canonical = canonical || ' ', hash = sha256(convert_to(canonical || ' ', 'UTF8')) where seq = 2",
    ],
    [
      "an erasable text",
      3,
      "text",
      "update ledger_text set content = 'something else' where seq = 3 and name = 'detail'",
    ],
    ["an event in the middle, taken out", 2, "gap", "delete from ledger_event where seq = 2"],
    [
      "the first event, taken out",
      1,
      "gap",
      "delete from ledger_text where seq = 1; delete from ledger_event where seq = 1",
    ],
  ])("names where it breaks: %s", async (_, brokenAt, reason, change) => {
    expect(await tampered(change, verdict)).toMatchObject({ ok: false, brokenAt, reason });
    expect(await verdict()).toMatchObject({ ok: true });
  });

  it("still holds once a text is erased, which the app may do", async () => {
    const erased = await api.db
      .updateTable("ledgerText")
      .set({ content: null })
      .where("seq", "=", "3")
      .executeTakeFirst();
    expect(erased.numUpdatedRows).toBe(2n);
    expect(await verdict()).toMatchObject({ ok: true });
    const { items } = (await get("/ledger/entries", { subject: "B-1" })).body;
    expect(items[0].texts).toEqual([
      { name: "detail", content: null },
      { name: "reason", content: null },
    ]);
  });
});

describe("a ledger that ends before the head that a signed release names", () => {
  it("is told as cut off", async () => {
    const { hash, seq } = (await get("/ledger/head")).body;
    const releaseNaming = (head: string) =>
      insertMadeUpRow(api.owner, "live_period", {
        kind: "'release'",
        sequence: String(Number.parseInt(head.slice(0, 6), 16)),
        release_document: `convert_to('{"ledgerHead":"${head}"}', 'UTF8')`,
        signature: "decode(repeat('00', 64), 'hex')",
        key_id: "'0000000000000000'",
      });
    await releaseNaming(hash);
    expect((await get("/ledger/verify")).body).toMatchObject({ ok: true });
    await releaseNaming("ab".repeat(32));
    expect((await get("/ledger/verify")).body).toMatchObject({ ok: false, brokenAt: seq + 1, reason: "cut-off" });
  });
});
