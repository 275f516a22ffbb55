import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { approveDerivation, arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, type BuiltPackage } from "../support/scenario/packaged";
import { arrangeStation, reportOf, sendWrites, type TestReport, type TestStation } from "../support/scenario/station";

let api: TestApi;
let people: ScenarioPeople;
let derived: DerivedLot;
let station: TestStation;
let second: TestStation;
let first: BuiltPackage;

const LOT = "MW20-2609";
const serial = (n: number) => `${LOT}-${String(n).padStart(5, "0")}`;
const MINUTE = 60_000;
const ago = (minutes: number) => new Date(Date.now() - minutes * MINUTE).toISOString();

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
  first = await arrangeReleased(people, derived);
  station = await arrangeStation(api, "Line 1");
  second = await arrangeStation(api, "Line 2");
}, 60_000);
afterAll(() => api.close());

const write = async (n: number, change: Partial<TestReport> & { of?: BuiltPackage } = {}, by = station) => {
  const { of = first, ...rest } = change;
  const report = await reportOf(api, { package: of.id, serial: serial(n) }, rest);
  const { status, body } = await sendWrites(api, by, [report]);
  expect(status).toBe(200);
  return body.results[0];
};
const trace = async (n: number, as: PersonName = "service") =>
  (await api.call("GET", `/devices/${serial(n)}`, { as })).body;
const event = (n: number, body: object, as: PersonName = "service") =>
  api.call("POST", `/devices/${serial(n)}/events`, { as, body });
const rewrites = async (): Promise<{ serial: string; why: string; carries: string | null }[]> =>
  (await api.call("GET", `/lots/${LOT}/rewrites`, { as: "engineer", query: { limit: 1_000 } })).body.items;
const whyOf = async (n: number) => (await rewrites()).find((row) => row.serial === serial(n))?.why;

describe("what a device carries", () => {
  it("is nothing before the first record, and the live image once it was written and read back", async () => {
    expect(await trace(1)).toMatchObject({
      serial: serial(1),
      lot: LOT,
      family: "MW-20",
      state: "never-written",
      current: null,
    });
    expect(await whyOf(1)).toBe("never-written");
    await write(1, { hardwareId: "B-1" });
    const body = await trace(1);
    expect(body).toMatchObject({
      state: "carries-live",
      hardwareId: "B-1",
      firmware: "2.3.0",
      current: {
        package: first.id,
        version: "1.0.0",
        station: "Line 1",
        outcome: "verified",
        known: true,
        live: true,
        sameValuesAsLive: true,
      },
      coefficients: { derivation: derived.derivation, state: "approved" },
    });
    expect(body.current.imageSha256).toMatch(/^[0-9a-f]{64}$/);
    expect(await whyOf(1)).toBeUndefined();
  });

  it.each([
    ["interrupted", { result: "interrupted", readbackSha256: null }],
    ["mismatch", { readbackSha256: "f".repeat(64) }],
    ["unknown-image", { imageSha256: "f".repeat(64), readbackSha256: "f".repeat(64) }],
  ] as [string, Partial<TestReport>][])("is unknown after %s, until it is written again", async (outcome, change) => {
    await write(2);
    await write(2, change);
    expect(await trace(2)).toMatchObject({
      state: "unknown",
      current: { outcome, known: false, live: false, sameValuesAsLive: null },
    });
    expect(await whyOf(2)).toBe("unknown");
    await write(2);
    expect(await trace(2)).toMatchObject({ state: "carries-live" });
  });

  it("does not change where a write failed before it touched the memory", async () => {
    await write(3);
    await write(3, { result: "failed", readbackSha256: null });
    expect(await trace(3)).toMatchObject({ state: "carries-live", current: { outcome: "verified" } });
    await write(4, { result: "failed", readbackSha256: null });
    expect(await trace(4)).toMatchObject({ state: "never-written", current: null });
  });

  it("follows a station's counter, not its clock", async () => {
    const early = await reportOf(api, { package: first.id, serial: serial(5) }, { finishedAt: ago(1) });
    const late = await reportOf(
      api,
      { package: first.id, serial: serial(5) },
      { finishedAt: ago(30), readbackSha256: "f".repeat(64) },
    );
    await sendWrites(api, station, [late, early]);
    expect(late.counter).toBeGreaterThan(early.counter);
    expect(await trace(5)).toMatchObject({ state: "unknown", current: { outcome: "mismatch" } });
  });

  it("follows the last finish among stations, whatever their counters", async () => {
    await write(6, { counter: 900_000, finishedAt: ago(30), readbackSha256: "f".repeat(64) });
    await write(6, { counter: 1, finishedAt: ago(1) }, second);
    expect(await trace(6)).toMatchObject({ state: "carries-live", current: { station: "Line 2" } });
  });

  it("is unknown once the board was replaced after the last write", async () => {
    await write(7, { hardwareId: "B-7" });
    const replaced = await event(7, { kind: "board-replaced", reason: "no answer", hardwareId: "B-77" });
    expect(replaced.status).toBe(201);
    expect(await trace(7)).toMatchObject({
      state: "unknown",
      hardwareId: "B-77",
      current: { outcome: "verified", known: false },
    });
    expect(await whyOf(7)).toBe("unknown");
    expect((await write(7, { hardwareId: "B-7" })).flags).toEqual(["board-changed"]);
    await write(7, { hardwareId: "B-77" });
    expect(await trace(7)).toMatchObject({ state: "carries-live" });
  });
});

describe("after another release", () => {
  let versionOnly: BuiltPackage;
  let otherValues: BuiltPackage;

  it("equal values count as equal: a device that differs in version numbers only is on no re-write list", async () => {
    for (const n of [10, 11, 12]) await write(n);
    versionOnly = await arrangeReleased(people, derived, { step: "minor" });
    expect(versionOnly.version).toBe("1.1.0");
    expect(await trace(10)).toMatchObject({
      state: "carries-live-values",
      current: { version: "1.0.0", live: false, known: true, sameValuesAsLive: true },
    });
    expect(await whyOf(10)).toBeUndefined();
    expect((await write(11)).flags).toEqual(["not-live"]);
    expect(await trace(11)).toMatchObject({ state: "carries-live-values" });
  });

  it("other values put exactly the devices on the list that carry the old ones", async () => {
    await write(12, { of: versionOnly });
    const { coefficients: own } = (
      await api.call("GET", `/lots/${LOT}/coefficients`, { as: "engineer", query: { limit: 100 } })
    ).body.items.find((one: { serial: string }) => one.serial === serial(10));
    const csv = `serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc\n${serial(10)},${own.tempOffset},${own.tempSlope},${own.zero + 0.001},${own.zeroTc},${own.gain},${own.gainTc}\n`;
    const imported = await api.call("POST", `/lots/${LOT}/coefficients`, {
      as: "engineer",
      body: csv,
      headers: { "content-type": "text/csv" },
      query: { referenceC: 20, capacityKg: 20 },
    });
    expect(imported.status).toBe(201);
    await approveDerivation(people, imported.body.id);
    otherValues = await arrangeReleased(people, derived);
    expect(await trace(10)).toMatchObject({
      state: "carries-other-values",
      current: { version: "1.0.0", known: true, live: false, sameValuesAsLive: false },
    });
    expect(await trace(11)).toMatchObject({ state: "carries-live-values" });
    const rows = await rewrites();
    expect(rows.find((row) => row.serial === serial(10))).toMatchObject({ why: "other-values", carries: "1.0.0" });
    for (const n of [11, 12]) expect(rows.map((row) => row.serial)).not.toContain(serial(n));
    await write(10, { of: otherValues });
    expect(await whyOf(10)).toBeUndefined();
  });

  it("the lot's thread counts who carries what is live, under whatever version number", async () => {
    const thread = await getLotThread(api.ctx("auditor"), LOT);
    const missing = (await rewrites()).length;
    expect(missing).toBeGreaterThan(5);
    expect(thread.written).toEqual({ tone: "wait", count: `${28 - missing} of 28 verified` });
  });

  it("the list is paged by serial and names no scrapped device", async () => {
    const all = await rewrites();
    const seen: string[] = [];
    for (let cursor: string | undefined; ; ) {
      const { body } = await api.call("GET", `/lots/${LOT}/rewrites`, {
        as: "service",
        query: { limit: 5, ...(cursor && { cursor }) },
      });
      seen.push(...body.items.map((row: { serial: string }) => row.serial));
      if (body.next === null) break;
      cursor = body.next;
    }
    expect(seen).toEqual(all.map((row) => row.serial));
    expect(seen).toContain(serial(4));
    await event(4, { kind: "scrap", reason: "dropped" });
    expect(await whyOf(4)).toBeUndefined();
    expect(await trace(4)).toMatchObject({ state: "scrapped", scrapped: true });
  });

  it("the list answers 401, 403 and 404, and is empty for a lot with nothing live", async () => {
    expect((await api.call("GET", `/lots/${LOT}/rewrites`)).status).toBe(401);
    expect((await api.call("GET", `/lots/${LOT}/rewrites`, { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", "/lots/NONE/rewrites", { as: "auditor" })).body.code).toBe("lot.not_found");
    await api.call("POST", "/lots", { as: "engineer", body: { code: "EMPTY", family: "MW-20", firmware: "2.3.0" } });
    expect((await api.call("GET", "/lots/EMPTY/rewrites", { as: "auditor" })).body).toEqual({ items: [], next: null });
  });
});

describe("POST /devices/{serial}/events", () => {
  const hold = (n: number, as: PersonName = "engineer", password = PASSWORD) =>
    event(n, { kind: "hold", reason: "odd zero", password }, as);
  const resume = (n: number, as: PersonName, password = PASSWORD) =>
    event(n, { kind: "resume", reason: "looked at", password }, as);

  it("holds by one person at once and lets go on by another", async () => {
    expect((await hold(20)).status).toBe(201);
    expect(await trace(20)).toMatchObject({ state: "held", held: true });
    expect((await hold(20, "service")).body.code).toBe("device.wrong_state");
    const own = await resume(20, "engineer");
    expect([own.status, own.body.code]).toEqual([403, "device.self_approval"]);
    expect(await trace(20)).toMatchObject({ held: true });
    expect((await resume(20, "engineer2")).status).toBe(201);
    expect(await trace(20)).toMatchObject({ held: false });
    expect((await resume(20, "service")).body.code).toBe("device.wrong_state");
  });

  it("lets one of two people hold, and one of two go on, at once", async () => {
    const held = await Promise.all([hold(21, "engineer"), hold(21, "service")]);
    expect(held.map((reply) => reply.status).sort()).toEqual([201, 409]);
    const gone = await Promise.all([resume(21, "engineer2"), resume(21, "engineer2")]);
    expect(gone.map((reply) => reply.status).sort()).toEqual([201, 409]);
  });

  it("asks for the password, in a browser, for hold and resume", async () => {
    expect((await event(22, { kind: "hold", reason: "x" }, "engineer")).status).toBe(422);
    const wrong = await hold(22, "engineer", "not it");
    expect([wrong.status, wrong.body.code]).toEqual([403, "auth.password_wrong"]);
    const key = await insertAccessKey(api.owner, api.people.engineer.id);
    const body = { kind: "hold", reason: "x", password: PASSWORD };
    const byKey = await api.call("POST", `/devices/${serial(22)}/events`, { as: { bearer: key }, body });
    expect([byKey.status, byKey.body.code]).toEqual([403, "auth.session_required"]);
    expect(await trace(22)).toMatchObject({ held: false });
  });

  it("notes firmware, rework, shipping and coming back in the history, newest first", async () => {
    await event(23, { kind: "firmware", reason: "update in the field", firmware: "2.4.0", reference: "RMA-7" });
    await event(23, { kind: "rework", reason: "new cable" });
    await event(23, { kind: "shipped", reason: "order 12" });
    expect((await event(23, { kind: "shipped", reason: "again" })).body.code).toBe("device.wrong_state");
    await event(23, { kind: "returned", reason: "scale reads high" });
    expect((await event(23, { kind: "returned", reason: "again" })).status).toBe(409);
    const body = await trace(23);
    expect(body).toMatchObject({ firmware: "2.4.0", shipped: false });
    const events = body.history.filter((entry: { kind: string }) => entry.kind === "event");
    expect(events.map((entry: { what: string }) => entry.what)).toEqual([
      "Came back",
      "Shipped",
      "Reworked",
      "Firmware changed",
    ]);
    expect(events[3]).toMatchObject({ who: "service", detail: "update in the field · RMA-7 · firmware 2.4.0" });
    const { items } = (await api.call("GET", "/ledger", { as: "auditor", query: { subject: serial(23) } })).body;
    expect(items.map((one: { action: string }) => one.action)).toEqual([
      "device.returned",
      "device.shipped",
      "device.rework",
      "device.firmware",
    ]);
  });

  it("does not ship what is held, nor do anything more to what is scrapped", async () => {
    await hold(24);
    expect((await event(24, { kind: "shipped", reason: "order" })).body.code).toBe("device.wrong_state");
    await event(25, { kind: "scrap", reason: "dropped" });
    for (const kind of ["rework", "shipped", "scrap"])
      expect((await event(25, { kind, reason: "x" })).body.code).toBe("device.wrong_state");
  });

  it.each([
    [422, "engineer", { kind: "lost", reason: "x" }],
    [422, "engineer", { kind: "rework" }],
    [422, "engineer", { kind: "board-replaced", reason: "x" }],
    [422, "engineer", { kind: "firmware", reason: "x" }],
    [403, "operator", { kind: "rework", reason: "x" }],
    [403, "auditor", { kind: "rework", reason: "x" }],
    [403, "reviewer", { kind: "rework", reason: "x" }],
  ] as [number, PersonName, object][])("answers %i to %s for %j and writes nothing", async (status, as, body) => {
    const before = (await trace(26)).history.length;
    expect((await event(26, body, as)).status).toBe(status);
    expect((await trace(26)).history).toHaveLength(before);
  });

  it("answers 401 and 404", async () => {
    const body = { kind: "rework", reason: "x" };
    expect((await api.call("POST", `/devices/${serial(26)}/events`, { body })).status).toBe(401);
    expect((await api.call("POST", "/devices/NONE/events", { as: "engineer", body })).body.code).toBe(
      "device.not_found",
    );
  });
});

describe("GET /devices/{serial}", () => {
  it("takes any case, and answers 401, 404 and 422", async () => {
    expect((await api.call("GET", `/devices/${serial(1).toLowerCase()}`, { as: "auditor" })).body.serial).toBe(
      serial(1),
    );
    expect((await api.call("GET", `/devices/${serial(1)}`)).status).toBe(401);
    expect((await api.call("GET", "/devices/NONE", { as: "auditor" })).body.code).toBe("device.not_found");
    expect((await api.call("GET", "/devices/no%20serial", { as: "auditor" })).status).toBe(422);
  });

  it("tells a reader everything from the readings on, and an operator nothing of work in progress", async () => {
    const kinds = async (as: PersonName) =>
      new Set((await trace(1, as)).history.map((entry: { kind: string }) => entry.kind));
    expect(await kinds("auditor")).toEqual(new Set(["written", "run", "coefficients", "approved", "live"]));
    expect(await kinds("operator")).toEqual(new Set(["written", "live"]));
    expect((await trace(1, "operator")).coefficients).toMatchObject({ state: "approved" });
  });
});
