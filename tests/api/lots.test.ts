import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { numberSerials } from "@/lib/domain/serials";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeFamilyLot, arrangeSecondFamilyLot } from "../support/scenario/family-lot";
import { firstGolden } from "../support/scenario/golden";

let api: TestApi;

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  await arrangeFamilyLot(people);
  await arrangeSecondFamilyLot(people);
});
afterAll(() => api.close());

const create = (code: string, more: object = {}) =>
  api.call("POST", "/lots", { as: "engineer", body: { code, family: "MW-20", firmware: "2.3.0", ...more } });
const add = (lot: string, serials: unknown, as: "engineer" | "engineer2" | "reviewer" = "engineer") =>
  api.call("POST", `/lots/${lot}/devices`, { as, body: { serials } });
const devicesOf = async (lot: string) =>
  (await api.call("GET", `/lots/${lot}/devices`, { as: "auditor", query: { limit: 1_000 } })).body.items.map(
    (device: { serial: string }) => device.serial,
  );

describe("POST /lots", () => {
  it("pins the newest published revision, also once a later one is published", async () => {
    const { status, body } = await create("mw20-new");
    expect(status).toBe(201);
    expect(body).toMatchObject({
      code: "MW20-NEW",
      family: "MW-20",
      revision: 1,
      state: "planned",
      devices: 0,
      sequence: 0,
    });
    const { family } = firstGolden();
    const revisions = "/families/MW-20/revisions";
    await api.call("POST", revisions, { as: "engineer", body: { ...family, minSoakMinutes: 120 } });
    expect((await create("MW20-DRAFT")).body.revision).toBe(1);
    await api.call("POST", `${revisions}/2/submit`, { as: "engineer" });
    await api.call("POST", `${revisions}/2/decisions`, {
      as: "reviewer",
      body: { decision: "approve", password: PASSWORD },
    });
    expect((await create("MW20-LATER")).body.revision).toBe(2);
    expect((await api.call("GET", "/lots/MW20-NEW", { as: "auditor" })).body.revision).toBe(1);
  });

  it.each([
    [409, "lot.exists", "MW20-2609", {}],
    [404, "family.not_found", "L-1", { family: "NONE" }],
    [422, "request.invalid", "L-2", { firmware: "2.3" }],
    [422, "request.invalid", "L-3", { firmware: "v2.3.0" }],
    [422, "request.invalid", "bad code", {}],
  ])("answers %i %s", async (status, code, lot, more) => {
    const reply = await create(lot, more);
    expect([reply.status, reply.body.code]).toEqual([status, code]);
  });

  it("needs a published revision", async () => {
    await api.call("POST", "/families", { as: "engineer", body: { ...firstGolden().family, code: "UNPUB" } });
    const { status, body } = await create("L-4", { family: "UNPUB" });
    expect([status, body.code]).toEqual([409, "family.no_published_revision"]);
  });

  it("is for engineers", async () => {
    const body = { code: "L-5", family: "MW-20", firmware: "2.3.0" };
    expect((await api.call("POST", "/lots", { body })).status).toBe(401);
    expect((await api.call("POST", "/lots", { as: "reviewer", body })).body.code).toBe("auth.forbidden");
  });
});

describe("GET /lots", () => {
  const list = async (query: Record<string, string | number>) =>
    (await api.call("GET", "/lots", { as: "auditor", query })).body;
  const codes = (body: { items: { code: string }[] }) => body.items.map((lot) => lot.code);

  it("lists newest first, by family, part of the code and state, in pages", async () => {
    expect(codes(await list({ family: "mw-300" }))).toEqual(["MW300-2610"]);
    expect(codes(await list({ q: "2609" }))).toEqual(["MW20-2609"]);
    expect(codes(await list({ state: "live" }))).toEqual([]);
    const first = await list({ family: "MW-20", limit: 1 });
    expect(codes(first)).toEqual(["MW20-LATER"]);
    expect(codes(await list({ family: "MW-20", limit: 1, cursor: first.next }))).toEqual(["MW20-DRAFT"]);
    const unknown = await api.call("GET", "/lots", { as: "auditor", query: { family: "NONE" } });
    expect(unknown.status).toBe(404);
    expect((await api.call("GET", "/lots", { as: "operator" })).status).toBe(403);
  });

  it("gives one by code in any case or by id", async () => {
    const { body } = await api.call("GET", "/lots/mw20-2609", { as: "service" });
    expect(body).toMatchObject({ code: "MW20-2609", firmware: "2.3.0", devices: 28, createdBy: "engineer" });
    expect((await api.call("GET", `/lots/${body.id}`, { as: "service" })).body.code).toBe("MW20-2609");
    expect((await api.call("GET", "/lots/NONE", { as: "service" })).body.code).toBe("lot.not_found");
  });
});

describe("POST /lots/{code}/devices", () => {
  it("adds serials once, upper-cased, and says which were known", async () => {
    await create("DEV");
    expect((await add("DEV", ["d-1", " D-2 ", "D-1"])).body).toEqual({ added: 2, known: 0 });
    expect((await add("dev", ["D-2", "D-3"])).body).toEqual({ added: 1, known: 1 });
    expect((await add("DEV", ["D-2"])).body).toEqual({ added: 0, known: 1 });
    expect(await devicesOf("DEV")).toEqual(["D-1", "D-2", "D-3"]);
  });

  it("adds nothing where a serial belongs to another lot, and says which", async () => {
    await create("OTHER");
    const { status, body } = await add("OTHER", ["O-1", "MW20-2609-00001", "MW300-2610-00001"]);
    expect([status, body.code, body.count]).toEqual([409, "device.in_other_lot", 2]);
    expect(body.serials[0]).toEqual({ serial: "MW20-2609-00001", lot: "MW20-2609" });
    expect(await devicesOf("OTHER")).toEqual([]);
  });

  it("refuses what is no serial and names where it stands", async () => {
    const { status, body } = await add("OTHER", ["O-1", "not a serial", "O-2"]);
    expect([status, body.errors[0].path]).toEqual([422, "/serials/1"]);
    expect((await add("OTHER", [])).status).toBe(422);
    expect((await add("NONE", ["N-1"])).status).toBe(404);
    expect((await add("OTHER", ["O-1"], "reviewer")).status).toBe(403);
    expect(await devicesOf("OTHER")).toEqual([]);
  });

  it("gives each serial of two simultaneous calls for two lots to one of them", async () => {
    await create("RACE-1");
    await create("RACE-2");
    const serials = numberSerials({ prefix: "RACE-", from: 1, count: 300, digits: 4 });
    const results = await Promise.all([add("RACE-1", serials), add("RACE-2", serials.toReversed(), "engineer2")]);
    expect(results.map((result) => result.status).sort()).toEqual([200, 409]);
    expect([(await devicesOf("RACE-1")).length, (await devicesOf("RACE-2")).length].sort()).toEqual([0, 300]);
  });

  it("counts each serial of two simultaneous calls for one lot once", async () => {
    await create("SAME");
    const serials = numberSerials({ prefix: "SAME-", from: 1, count: 200, digits: 4 });
    const results = await Promise.all([add("SAME", serials), add("SAME", serials, "engineer2")]);
    expect(results.map((result) => result.body).sort((a, b) => a.added - b.added)).toEqual([
      { added: 0, known: 200 },
      { added: 200, known: 0 },
    ]);
  });

  it("takes 60,000 and not one more", async () => {
    await create("FULL");
    const serials = numberSerials({ prefix: "FULL-", from: 1, count: 60_000, digits: 5 });
    expect((await add("FULL", serials)).body).toEqual({ added: 60_000, known: 0 });
    const { status, body } = await add("FULL", ["FULL-X"]);
    expect([status, body.code]).toEqual([422, "lot.too_many_devices"]);
    expect((await add("FULL", serials)).body).toEqual({ added: 0, known: 60_000 });
  }, 120_000);
});

describe("GET /lots/{code}/devices", () => {
  it("lists by serial in pages, with state", async () => {
    const first = await api.call("GET", "/lots/MW20-2609/devices", { as: "service", query: { limit: 20 } });
    expect(first.body.items).toHaveLength(20);
    expect(first.body.items[0]).toMatchObject({ serial: "MW20-2609-00001", state: "active", coefficients: null });
    const query = { limit: 20, cursor: first.body.next };
    const rest = await api.call("GET", "/lots/MW20-2609/devices", { as: "service", query });
    expect([rest.body.items.length, rest.body.next]).toEqual([8, null]);
    expect((await api.call("GET", "/lots/NONE/devices", { as: "service" })).status).toBe(404);
  });
});

describe("the thread of a lot", () => {
  it("says what is due", async () => {
    const thread = await getLotThread(api.ctx("auditor"), "MW20-2609");
    expect(thread).toMatchObject({
      lot: "MW20-2609",
      serials: { tone: "good", count: "28 in the lot" },
      readings: { tone: "wait", count: "no run yet" },
      coefficients: { tone: "idle" },
      package: { tone: "idle" },
      review: { tone: "idle" },
      written: { tone: "idle" },
      newestPackageId: null,
    });
    const empty = await getLotThread(api.ctx("auditor"), "OTHER");
    expect(empty.serials).toEqual({ tone: "wait", count: "none yet", blocked: "add serials first" });
  });
});
