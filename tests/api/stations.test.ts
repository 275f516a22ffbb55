import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeFamilyLot, arrangeSecondFamilyLot } from "../support/scenario/family-lot";

let api: TestApi;

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  await arrangeFamilyLot(people);
  await arrangeSecondFamilyLot(people);
});
afterAll(() => api.close());

const create = (name: string, families: string[] = ["MW-20"], as: PersonName = "admin") =>
  api.call("POST", "/stations", { as, body: { name, families } });
const makeKey = (id: string, body: object = { password: PASSWORD }, as: PersonName = "admin") =>
  api.call("POST", `/stations/${id}/keys`, { as, body });
const live = (key: string) => api.call("GET", "/station/live", { as: { bearer: key } });
const actionsOf = async (subject: string) =>
  (await api.call("GET", "/ledger", { as: "auditor", query: { subject, order: "asc" } })).body.items.map(
    (event: { action: string }) => event.action,
  );

describe("POST /stations", () => {
  it("adds a station with its families, once by name", async () => {
    const { status, body } = await create("Line 1", ["mw-20", "MW-300", "MW-20"]);
    expect(status).toBe(201);
    expect(body).toMatchObject({
      name: "Line 1",
      active: true,
      families: ["MW-20", "MW-300"],
      keys: [],
      lastSeenAt: null,
    });
    const again = await create("Line 1");
    expect([again.status, again.body.code]).toEqual([409, "station.exists"]);
    expect(await actionsOf(body.id)).toEqual(["station.added"]);
  });

  it("adds one of two of the same name at once", async () => {
    const both = await Promise.all([create("Twin"), create("Twin", ["MW-300"], "admin2")]);
    expect(both.map((reply) => reply.status).sort()).toEqual([201, 409]);
  });

  it.each([
    [404, "family.not_found", { name: "No family", families: ["NONE"] }],
    [422, "request.invalid", { name: "", families: ["MW-20"] }],
    [422, "request.invalid", { name: "No families", families: [] }],
    [422, "request.invalid", { name: "Wrong member", families: ["MW-20"], family: "MW-20" }],
    [422, "request.invalid", { name: "With\u0000nul", families: ["MW-20"] }],
  ])("answers %i %s", async (status, code, body) => {
    const reply = await api.call("POST", "/stations", { as: "admin", body });
    expect([reply.status, reply.body.code]).toEqual([status, code]);
  });

  it("is for admins", async () => {
    const body = { name: "Not mine", families: ["MW-20"] };
    expect((await api.call("POST", "/stations", { body })).status).toBe(401);
    for (const as of ["engineer", "reviewer", "auditor", "operator"] as const)
      expect((await api.call("POST", "/stations", { as, body })).body.code).toBe("auth.forbidden");
    const key = await insertAccessKey(api.owner, api.people.admin.id);
    expect((await api.call("POST", "/stations", { as: { bearer: key }, body })).body.code).toBe(
      "auth.session_required",
    );
  });
});

describe("GET /stations", () => {
  it("lists by name in pages and gives one", async () => {
    await create("Page A");
    await create("Page B");
    const first = await api.call("GET", "/stations", { as: "auditor", query: { limit: 1 } });
    expect(first.body.items).toHaveLength(1);
    const all = await api.call("GET", "/stations", { as: "auditor", query: { cursor: first.body.items[0].name } });
    expect(all.body.items.map((one: { name: string }) => one.name)).toContain("Page B");
    const { id } = all.body.items[0];
    expect((await api.call("GET", `/stations/${id}`, { as: "engineer" })).body).toEqual(all.body.items[0]);
  });

  it("answers 401, 403, 404 and 422", async () => {
    const nobody = "00000000-0000-7000-8000-000000000000";
    expect((await api.call("GET", "/stations")).status).toBe(401);
    expect((await api.call("GET", "/stations", { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", `/stations/${nobody}`, { as: "admin" })).body.code).toBe("station.not_found");
    expect((await api.call("GET", "/stations/none", { as: "admin" })).status).toBe(422);
    expect((await api.call("GET", `/stations/${nobody}/writes`, { as: "admin" })).status).toBe(404);
  });
});

describe("PATCH /stations/{id}", () => {
  const change = (id: string, body: object, as: PersonName = "admin") =>
    api.call("PATCH", `/stations/${id}`, { as, body });

  it("renames, changes families and stops all keys at once", async () => {
    const { id } = (await create("To change")).body;
    const { key } = (await makeKey(id)).body;
    expect((await live(key)).status).toBe(200);
    const { body } = await change(id, { name: "Changed", families: ["MW-300"] });
    expect(body).toMatchObject({ name: "Changed", families: ["MW-300"], active: true });
    await change(id, { active: false });
    expect((await live(key)).status).toBe(401);
    await change(id, { active: true });
    expect((await live(key)).status).toBe(200);
    expect((await actionsOf(id)).filter((action: string) => action === "station.changed")).toHaveLength(3);
  });

  it("answers 403, 404, 409 and 422 and then changes nothing", async () => {
    const { id } = (await create("Stays")).body;
    await create("Taken");
    expect((await change(id, { name: "Mine" }, "engineer")).status).toBe(403);
    expect((await change("00000000-0000-7000-8000-000000000000", { active: false })).status).toBe(404);
    expect((await change(id, { name: "Taken" })).body.code).toBe("station.exists");
    expect((await change(id, { families: ["NONE"], name: "Half" })).body.code).toBe("family.not_found");
    expect((await change(id, {})).status).toBe(422);
    expect((await change(id, { families: [] })).status).toBe(422);
    expect((await api.call("GET", `/stations/${id}`, { as: "admin" })).body.name).toBe("Stays");
    expect(await actionsOf(id)).toEqual(["station.added"]);
  });
});

describe("keys of a station", () => {
  it("are shown once, work, note their use and can be revoked", async () => {
    const { id } = (await create("Keys")).body;
    const made = await makeKey(id);
    expect(made.status).toBe(201);
    const { key, prefix } = made.body;
    expect(key).toMatch(/^tws_[\w-]{43}$/);
    expect(key.startsWith(prefix)).toBe(true);
    expect((await live(key)).body).toMatchObject({ items: [] });
    const { body } = await api.call("GET", `/stations/${id}`, { as: "auditor" });
    expect(body.keys).toEqual([
      { id: made.body.id, prefix, createdAt: expect.any(String), lastUsedAt: expect.any(String), revokedAt: null },
    ]);
    expect(Date.now() - Date.parse(body.lastSeenAt)).toBeLessThan(60_000);
    expect(JSON.stringify(body)).not.toContain(key);

    const remove = () => api.call("DELETE", `/stations/${id}/keys/${made.body.id}`, { as: "admin2" });
    expect((await remove()).status).toBe(204);
    expect((await live(key)).status).toBe(401);
    const again = await remove();
    expect([again.status, again.body.code]).toEqual([404, "key.not_found"]);
    expect(await actionsOf(id)).toEqual(["station.added", "station-key.made", "station-key.revoked"]);
  });

  it("note their use once a minute at most", async () => {
    const { id } = (await create("Seen")).body;
    const { key } = (await makeKey(id)).body;
    const seen = async () => (await api.call("GET", `/stations/${id}`, { as: "admin" })).body.lastSeenAt;
    await live(key);
    const first = await seen();
    await live(key);
    expect(await seen()).toBe(first);
    const before = new Date(Date.now() - 61_000);
    await api.owner.updateTable("stationKey").set({ lastUsedAt: before }).where("stationId", "=", id).execute();
    await live(key);
    expect(Date.parse(await seen())).toBeGreaterThan(Date.parse(first));
  });

  it("take an admin in a browser and the password again", async () => {
    const { id } = (await create("Guarded")).body;
    expect((await makeKey(id, {})).body.code).toBe("request.invalid");
    const wrong = await makeKey(id, { password: "not it" });
    expect([wrong.status, wrong.body.code]).toEqual([403, "auth.password_wrong"]);
    expect((await makeKey(id, { password: PASSWORD }, "engineer")).body.code).toBe("auth.forbidden");
    expect((await makeKey("00000000-0000-7000-8000-000000000000")).body.code).toBe("station.not_found");
    const { key } = (await makeKey(id)).body;
    const byKey = await api.call("POST", `/stations/${id}/keys`, { as: { bearer: key }, body: { password: PASSWORD } });
    expect(byKey.body.code).toBe("auth.forbidden");
    expect((await api.call("GET", `/stations/${id}`, { as: "admin" })).body.keys).toHaveLength(1);
    const other = (await create("Other")).body.id;
    const { keys } = (await api.call("GET", `/stations/${id}`, { as: "admin" })).body;
    expect((await api.call("DELETE", `/stations/${other}/keys/${keys[0].id}`, { as: "admin" })).status).toBe(404);
    expect((await live(key)).status).toBe(200);
  });

  it("are no person's, and a person's key is no station's", async () => {
    const { id } = (await create("Apart")).body;
    const { key } = (await makeKey(id)).body;
    for (const path of ["/stations", "/lots", "/ledger", "/devices/MW20-2609-00001"])
      expect((await api.call("GET", path, { as: { bearer: key } })).status).toBe(403);
    expect((await api.call("GET", "/station/live", { as: "engineer" })).status).toBe(403);
    expect((await api.call("GET", "/station/live")).status).toBe(401);
    expect((await live("tws_not-a-key")).status).toBe(401);
  });
});
