import { v7 as uuidv7 } from "uuid";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeSecondFamilyLot } from "../support/scenario/family-lot";
import { arrangeReleased, buildGolden } from "../support/scenario/packaged";
import { arrangeStation, reportOf, sendWrites, type TestReport, type TestStation } from "../support/scenario/station";

let api: TestApi;
let people: ScenarioPeople;
let station: TestStation;
let elsewhere: TestStation;
let live: string;

const LOT = "MW20-2609";
const serial = (n: number) => `${LOT}-${String(n).padStart(5, "0")}`;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const derived = await arrangeDerived(people);
  await arrangeSecondFamilyLot(people);
  live = (await arrangeReleased(people, derived)).id;
  station = await arrangeStation(api, "Line 1");
  elsewhere = await arrangeStation(api, "Line 2", ["MW-300"]);
}, 60_000);
afterAll(() => api.close());

const report = (n: number, change: Partial<TestReport> = {}) =>
  reportOf(api, { package: live, serial: serial(n) }, change);
const send = (writes: unknown[], by = station) => sendWrites(api, by, writes);
/** Sends one record. @returns its outcome and flags as one list */
const judged = async (n: number, change: Partial<TestReport> = {}, by = station): Promise<string[]> => {
  const { body } = await send([await report(n, change)], by);
  return [body.results[0].outcome, ...body.results[0].flags];
};
const traceOf = async (of: string) => (await api.call("GET", `/devices/${of}`, { as: "service" })).body;
const countRecords = async () => {
  const { count } = await api.owner
    .selectFrom("writeRecord")
    .select((eb) => eb.fn.countAll<string>().as("count"))
    .executeTakeFirstOrThrow();
  return Number(count);
};
const events = async () =>
  (await api.call("GET", "/ledger", { as: "auditor", query: { action: "writes.recorded" } })).body.items;

describe("GET /station/live", () => {
  it("names what may be written for the station's families only, and until when that holds", async () => {
    const { body } = await api.call("GET", "/station/live", { as: { bearer: station.key } });
    expect(body.items).toHaveLength(1);
    expect(body.items[0]).toMatchObject({
      lot: LOT,
      family: "MW-20",
      package: live,
      version: "1.0.0",
      sequence: 1,
      held: [],
    });
    expect(body.items[0].digest).toMatch(/^[0-9a-f]{64}$/);
    expect(body.items[0].devices).toBeGreaterThan(20);
    const hours = (Date.parse(body.validUntil) - Date.now()) / 3_600_000;
    expect(hours).toBeGreaterThan(23.9);
    expect(hours).toBeLessThanOrEqual(24);
    const other = await api.call("GET", "/station/live", { as: { bearer: elsewhere.key } });
    expect(other.body.items).toEqual([]);
  });

  it("names devices that are held", async () => {
    const body = { kind: "hold", reason: "smells of solder", password: PASSWORD };
    expect((await api.call("POST", `/devices/${serial(28)}/events`, { as: "service", body })).status).toBe(201);
    const reply = await api.call("GET", "/station/live", { as: { bearer: station.key } });
    expect(reply.body.items[0].held).toEqual([serial(28)]);
    expect(await judged(28)).toEqual(["verified", "held"]);
  });

  it("is noted in the access log, as every download is, and not in the ledger", async () => {
    const head = async () => (await api.call("GET", "/ledger/head", { as: "auditor" })).body.seq;
    const before = await head();
    await api.call("GET", "/station/live", { as: { bearer: station.key } });
    const bundle = await api.call("GET", `/station/packages/${live}/bundle`, { as: { bearer: station.key } });
    expect(bundle.status).toBe(200);
    await api.call("GET", `/packages/${live}/manifest`, { as: "auditor" });
    const rows = await api.owner.selectFrom("accessLog").select(["kind", "stationId", "personId", "detail"]).execute();
    expect(rows).toContainEqual({ kind: "station.poll", stationId: station.id, personId: null, detail: {} });
    const of = (what: string) => ({ kind: "download", detail: { what, package: live } });
    expect(rows).toContainEqual({ ...of("bundle"), stationId: station.id, personId: null });
    expect(rows).toContainEqual({ ...of("manifest"), stationId: null, personId: api.people.auditor.id });
    expect(await head()).toBe(before);
  });
});

describe("POST /station/writes", () => {
  it("tells verified, mismatched, failed, interrupted and unknown apart", async () => {
    const other = "f".repeat(64);
    expect(await judged(1)).toEqual(["verified"]);
    expect(await judged(1, { readbackSha256: other })).toEqual(["mismatch"]);
    expect(await judged(1, { readbackSha256: null })).toEqual(["mismatch", "no-readback"]);
    expect(await judged(1, { result: "failed", readbackSha256: null })).toEqual(["failed"]);
    expect(await judged(1, { result: "interrupted", readbackSha256: null })).toEqual(["interrupted"]);
    expect(await judged(1, { imageSha256: other, readbackSha256: other })).toEqual(["unknown-image"]);
    expect(await judged(1, { package: uuidv7() })).toEqual(["unknown-image", "not-live"]);
    expect(await judged(1, { package: "no package at all" })).toEqual(["unknown-image", "not-live"]);
    expect(await judged(1, { package: "-".repeat(36) })).toEqual(["unknown-image", "not-live"]);
    expect(await judged(1, { package: live.toUpperCase() })).toEqual(["verified"]);
  });

  it("records what belongs to an unknown serial, and counts it once the serial is known", async () => {
    const stray = await reportOf(api, { package: live, serial: "STRAY-1" });
    expect((await send([stray])).body.results[0]).toEqual({
      id: stray.id,
      outcome: "unknown-serial",
      flags: ["not-live"],
    });
    const { items } = (
      await api.call("GET", `/stations/${station.id}/writes`, { as: "auditor", query: { q: "stray" } })
    ).body;
    expect(items).toHaveLength(1);
    expect(items[0]).toMatchObject({ serial: "STRAY-1", outcome: "unknown-serial", package: null });
    await api.call("POST", `/lots/${LOT}/devices`, { as: "engineer", body: { serials: ["STRAY-1"] } });
    const { body } = await api.call("GET", "/devices/STRAY-1", { as: "service" });
    expect(body).toMatchObject({ state: "unknown", current: { outcome: "unknown-serial", known: false } });
  });

  it("takes a record twice as a duplicate, spelt in another way too, and other content as a conflict that changes nothing", async () => {
    const first = await report(2, { operator: "First" });
    await send([first]);
    const [records, noted] = [await countRecords(), (await events()).length];
    const again = await send([first, { ...first, id: first.id.toUpperCase(), serialBefore: null, detail: null }]);
    expect(again.body.results).toEqual([
      { id: first.id, outcome: "duplicate", flags: [] },
      { id: first.id.toUpperCase(), outcome: "duplicate", flags: [] },
    ]);
    expect([await countRecords(), (await events()).length]).toEqual([records, noted]);
    const conflict = await send([{ ...first, operator: "Second" }]);
    expect(conflict.body.results).toEqual([{ id: first.id, outcome: "conflict", flags: [] }]);
    expect(await countRecords()).toBe(records);
    expect((await events())[0].data).toMatchObject({ count: 0, conflicts: [first.id] });
    const { items } = (await api.call("GET", `/lots/${LOT}/writes`, { as: "auditor", query: { q: serial(2) } })).body;
    expect(items[0].operator).toBe("First");
  });

  it("keeps the first of one id that comes twice in one upload", async () => {
    const first = await report(3);
    const { body } = await send([first, first, { ...first, counter: first.counter + 1 }]);
    expect(body.results.map((result: { outcome: string }) => result.outcome)).toEqual([
      "verified",
      "duplicate",
      "conflict",
    ]);
  });

  it("gives a conflict where another station used the id", async () => {
    const first = await report(3);
    await send([first]);
    expect((await send([first], elsewhere)).body.results[0].outcome).toBe("conflict");
  });

  it("stores each record of two uploads of the same batch at once one time", async () => {
    const batch: TestReport[] = [];
    for (let i = 0; i < 200; i++) batch.push(await report(1 + (i % 20)));
    const [before, noted] = [await countRecords(), (await events()).length];
    const both = await Promise.all([send(batch), send(batch.toReversed())]);
    expect(both.map((reply) => reply.status)).toEqual([200, 200]);
    const outcomes = both.map((reply) => reply.body.results.map((result: { outcome: string }) => result.outcome));
    expect(
      outcomes.map((list: string[]) => list.filter((one) => one === "verified").length).sort((a, b) => a - b),
    ).toEqual([0, 200]);
    expect(outcomes.flat().filter((one: string) => one === "duplicate")).toHaveLength(200);
    expect(await countRecords()).toBe(before + 200);
    expect(await events()).toHaveLength(noted + 1);
    expect((await events())[0].data.count).toBe(200);
  });

  it("stores records of one device from two stations at once", async () => {
    const mine: TestReport[] = [];
    const theirs: TestReport[] = [];
    for (let i = 0; i < 60; i++) {
      mine.push(await report(1 + (i % 25), { hardwareId: "B-MINE" }));
      theirs.unshift(await report(1 + (i % 25), { hardwareId: "B-THEIRS" }));
    }
    const both = await Promise.all([send(mine), send(theirs, elsewhere)]);
    expect(both.map((reply) => reply.status)).toEqual([200, 200]);
    const boardsSeen = await Promise.all(
      [...mine, ...theirs].slice(0, 5).map(async ({ serial: one }) => (await traceOf(one)).hardwareId),
    );
    expect(new Set(boardsSeen).size).toBe(1);
    const changed = both.map((reply) =>
      reply.body.results.filter((one: { flags: string[] }) => one.flags.includes("board-changed")),
    );
    expect(changed.map((list) => list.length).sort((a, b) => a - b)).toEqual([0, 60]);
  });

  it("takes 1,000 records and refuses 1,001, then storing none", async () => {
    const first = await report(4);
    const many = Array.from({ length: 1_001 }, (_, i) => ({ ...first, id: uuidv7(), counter: first.counter + i }));
    const before = await countRecords();
    const refused = await send(many);
    expect([refused.status, refused.body.code]).toEqual([422, "request.invalid"]);
    expect(await countRecords()).toBe(before);
    const taken = await send(many.slice(1));
    expect(taken.body.results).toHaveLength(1_000);
    expect(await countRecords()).toBe(before + 1_000);
  });

  it.each([
    ["no records", []],
    ["a wrong digest", [{ imageSha256: "ABC" }]],
    ["no id", [{ id: "1" }]],
    ["a counter that is no whole number", [{ counter: 1.5 }]],
    ["an unknown result", [{ result: "perhaps" }]],
    ["a time without a zone", [{ finishedAt: "2026-12-01T10:00:00" }]],
    ["a serial that is none", [{ serial: "no serial" }]],
    ["NUL in a text", [{ operator: "A\0B" }]],
    ["half a character pair", [{ detail: "\ud83d" }]],
    ["a number that is none", [{ zeroMvV: "1" }]],
  ])("refuses an upload with %s, all of it", async (_, changes) => {
    const good = await report(5);
    const before = await countRecords();
    const writes =
      changes.length === 0 ? [] : [good, ...changes.map((change) => ({ ...good, id: uuidv7(), ...change }))];
    const { status, body } = await send(writes);
    expect([status, body.code]).toEqual([422, "request.invalid"]);
    if (writes.length > 0) expect(body.errors[0].path).toMatch(/^\/writes\/1\//);
    expect(await countRecords()).toBe(before);
  });

  it("is for stations", async () => {
    const writes = [await report(5)];
    expect((await api.call("POST", "/station/writes", { body: { writes } })).status).toBe(401);
    expect((await api.call("POST", "/station/writes", { as: "operator", body: { writes } })).status).toBe(403);
    const bad = await api.call("POST", "/station/writes", {
      as: { bearer: station.key },
      body: "{",
      headers: { "content-type": "application/json" },
    });
    expect([bad.status, bad.body.code]).toEqual([400, "request.malformed"]);
  });
});

describe("flags", () => {
  it("say what a person should look at", async () => {
    const past = new Date(Date.now() - 2 * 3_600_000).toISOString();
    const future = new Date(Date.now() + 10 * 60_000).toISOString();
    expect(await judged(6, { serialBefore: serial(7) })).toEqual(["verified", "serial-differs"]);
    expect(await judged(6, { serialBefore: serial(6).toLowerCase() })).toEqual(["verified"]);
    expect(await judged(6, { firmware: "2.3.1" })).toEqual(["verified", "firmware-differs"]);
    expect(await judged(6, { firmware: "2.3.0" })).toEqual(["verified"]);
    expect(await judged(6, { finishedAt: past })).toEqual(["verified", "not-live", "late"]);
    expect(await judged(6, { finishedAt: future })).toEqual(["verified", "clock-ahead"]);
    expect(await judged(6, {}, elsewhere)).toEqual(["verified", "station-not-allowed"]);
  });

  it("hold the unloaded signal against the device's own zero curve", async () => {
    const { items } = (await api.call("GET", `/lots/${LOT}/coefficients`, { as: "engineer", query: { limit: 100 } }))
      .body;
    const own = items.find((one: { serial: string }) => one.serial === serial(8)).coefficients;
    const deviceTemp = (25 - own.tempOffset) / own.tempSlope;
    const zero = own.zero + own.zeroTc * (25 - 20);
    expect(await judged(8, { deviceTemp, zeroMvV: zero + 0.0195 })).toEqual(["verified"]);
    expect(await judged(8, { deviceTemp, zeroMvV: zero + 0.0205 })).toEqual(["verified", "zero-off"]);
  });

  it("take the first verified board as the device's and flag another, in one upload too", async () => {
    const [a, b, c] = [
      await report(26, { hardwareId: "BOARD-A", readbackSha256: null }),
      await report(26, { hardwareId: "BOARD-B" }),
      await report(26, { hardwareId: "BOARD-C" }),
    ];
    const { body } = await send([a, b, c]);
    expect(body.results.map((result: { flags: string[] }) => result.flags)).toEqual([
      ["no-readback"],
      [],
      ["board-changed"],
    ]);
    expect((await api.call("GET", `/devices/${serial(26)}`, { as: "service" })).body.hardwareId).toBe("BOARD-B");
    expect(await judged(26, { hardwareId: "BOARD-A" })).toEqual(["verified", "board-changed"]);
  });

  it("tell a write of a package that was not released", async () => {
    const { id } = await buildGolden(people, { lot: LOT, layoutVersion: "1.0.0" });
    expect(await judged(9, { package: id, ...(await digestsOf(id, 9)) })).toEqual(["verified", "not-live"]);
    const { body } = await api.call("GET", `/devices/${serial(9)}`, { as: "service" });
    expect(body.current).toMatchObject({ package: id, live: false, sameValuesAsLive: true });
  });
});

const digestsOf = async (packageId: string, n: number) => {
  const { imageSha256, readbackSha256 } = await reportOf(api, { package: packageId, serial: serial(n) });
  return { imageSha256, readbackSha256 };
};

describe("GET /lots/{code}/writes", () => {
  it("lists newest received first, in pages and filtered", async () => {
    const list = (query: Record<string, string | number | boolean>) =>
      api.call("GET", `/lots/${LOT}/writes`, { as: "auditor", query });
    const seen: string[] = [];
    for (let cursor: string | undefined; ; ) {
      const { body } = await list({ limit: 700, ...(cursor && { cursor }) });
      seen.push(...body.items.map((write: { id: string }) => write.id));
      if (body.next === null) break;
      cursor = body.next;
    }
    expect(new Set(seen).size).toBe(seen.length);
    const flagged = (await list({ flagged: true, limit: 1_000 })).body.items;
    expect(flagged.length).toBeGreaterThan(5);
    expect(flagged.every((write: { flags: string[] }) => write.flags.length > 0)).toBe(true);
    const mismatches = (await list({ outcome: "mismatch" })).body.items;
    expect(new Set(mismatches.map((write: { outcome: string }) => write.outcome))).toEqual(new Set(["mismatch"]));
    expect((await list({ q: "00026" })).body.items).toHaveLength(4);
  });

  it("answers 401, 403, 404 and 422", async () => {
    const path = `/lots/${LOT}/writes`;
    expect((await api.call("GET", path)).status).toBe(401);
    expect((await api.call("GET", path, { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", "/lots/NONE/writes", { as: "auditor" })).body.code).toBe("lot.not_found");
    expect((await api.call("GET", path, { as: "auditor", query: { outcome: "fine" } })).status).toBe(422);
    expect((await api.call("GET", path, { as: "auditor", query: { cursor: "x" } })).status).toBe(422);
  });
});

describe("after the live package was withdrawn", () => {
  it("stations hear of it at once, and what is written from then on is flagged, not what was written before", async () => {
    const before = await report(10);
    const body = { reason: "zero drifts", password: PASSWORD };
    const withdrawn = await api.call("POST", `/packages/${live}/withdraw`, { as: "reviewer", body });
    expect(withdrawn.status).toBe(200);
    const polled = await api.call("GET", "/station/live", { as: { bearer: station.key } });
    expect(polled.body.items).toEqual([
      {
        lot: LOT,
        family: "MW-20",
        package: null,
        version: null,
        digest: null,
        sequence: 2,
        devices: 0,
        held: [serial(28)],
      },
    ]);
    expect((await send([before])).body.results[0]).toMatchObject({ outcome: "verified", flags: [] });
    expect(await judged(11)).toEqual(["verified", "not-live"]);
    expect(await traceOf(serial(11))).toMatchObject({
      state: "carries-unreleased",
      current: { package: live, known: true, live: false, sameValuesAsLive: null },
    });
    const { status } = await api.call("GET", `/station/packages/${live}/bundle`, { as: { bearer: station.key } });
    expect(status).toBe(409);
  });
});
