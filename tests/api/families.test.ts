import { execFileSync } from "node:child_process";
import { v7 as uuidv7 } from "uuid";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { canonicalJson } from "@/lib/domain/canonical-json";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { firstGolden } from "../support/scenario/golden";

let api: TestApi;
const golden = firstGolden().family;
const approve = { decision: "approve", password: PASSWORD };

beforeAll(async () => {
  api = await openTestApi();
  const at = new Date();
  // Somebody who may both write and decide, so that the refusal rests on who wrote.
  const grant = { id: uuidv7(), personId: api.people.engineer2.id, role: "reviewer", askedAt: at, confirmedAt: at };
  await api.owner.insertInto("roleGrant").values(grant).execute();
});
afterAll(() => api.close());

const create = (code: string, values: object = {}) =>
  api.call("POST", "/families", { as: "engineer", body: { ...golden, code, ...values } });
const submit = (code: string, n = 1) => api.call("POST", `/families/${code}/revisions/${n}/submit`, { as: "engineer" });
const decide = (code: string, as: Parameters<TestApi["call"]>[2] = {}, n = 1) =>
  api.call("POST", `/families/${code}/revisions/${n}/decisions`, { as: "reviewer", body: approve, ...as });
const countOf = async (table: "family" | "approval" | "ledgerEvent") =>
  (
    await api.owner
      .selectFrom(table)
      .select((eb) => eb.fn.countAll().as("n"))
      .executeTakeFirstOrThrow()
  ).n;

describe("POST /families", () => {
  it("adds revision 1 as a draft, its digest the SHA-256 of the canonical document", async () => {
    const { status, body } = await create("mw-20");
    expect(status).toBe(201);
    expect(body).toMatchObject({ code: "MW-20", revision: 1, state: "draft", makers: ["engineer"], decisions: [] });
    expect(body.document).toEqual(golden);
    // sha256sum of GNU coreutils as the outside judge of the digest.
    const sum = execFileSync("sha256sum", { input: canonicalJson(golden) })
      .toString()
      .slice(0, 64);
    expect(body.sha256).toBe(sum);
  });

  it("refuses a code that is taken and writes nothing", async () => {
    const before = [await countOf("family"), await countOf("ledgerEvent")];
    const { status, body } = await create("MW-20");
    expect([status, body.code]).toEqual([409, "family.exists"]);
    expect([await countOf("family"), await countOf("ledgerEvent")]).toEqual(before);
  });

  it.each([
    ["/temperatureMaxC", { temperatureMinC: 40, temperatureMaxC: 10 }],
    ["/intervals", { accuracyClass: "B", intervals: 3_000 }],
    ["/intervals", { accuracyClass: "C", intervals: 10_001 }],
    ["/pLc", { pLc: 0.81 }],
    ["/coverage", { coverage: 1 }],
    ["/minLoadFraction", { minLoadFraction: 1.5 }],
    ["/capacityKg", { capacityKg: 0 }],
    ["/accuracyClass", { accuracyClass: "E" }],
    ["/nominalMvV", { nominalMvV: "2" }],
  ])("refuses values out of bounds and names %s", async (path, values) => {
    const { status, body } = await create("BAD", values);
    expect([status, body.code]).toEqual([422, "request.invalid"]);
    expect(body.errors.map((error: { path: string }) => error.path)).toContain(path);
  });

  it("takes the ends of the table of classes (OIML R 60-1:2021, table 1)", async () => {
    expect((await create("C-LOW", { intervals: 500 })).status).toBe(201);
    expect((await create("B-HIGH", { accuracyClass: "B", intervals: 100_000 })).status).toBe(201);
    expect((await create("D-LOW", { accuracyClass: "D", intervals: 100 })).status).toBe(201);
  });

  it("is for engineers who are signed in", async () => {
    expect((await api.call("POST", "/families", { body: golden })).status).toBe(401);
    for (const as of ["reviewer", "auditor", "operator", "admin"] as const) {
      const { status, body } = await api.call("POST", "/families", { as, body: { ...golden, code: "NO" } });
      expect([status, body.code]).toEqual([403, "auth.forbidden"]);
    }
  });

  it("answers a repeated request from memory", async () => {
    const headers = { "idempotency-key": "family-once" };
    const body = { ...golden, code: "ONCE" };
    const first = await api.call("POST", "/families", { as: "engineer", body, headers });
    const again = await api.call("POST", "/families", { as: "engineer", body, headers });
    expect([first.status, again.status]).toEqual([201, 201]);
    expect(again.body.id).toBe(first.body.id);
  });
});

describe("GET /families", () => {
  it("lists by code, in pages", async () => {
    const first = await api.call("GET", "/families", { as: "auditor", query: { limit: 1 } });
    expect(first.body.items).toHaveLength(1);
    const rest = await api.call("GET", "/families", { as: "auditor", query: { cursor: first.body.next } });
    expect(rest.body.items.map((family: { code: string }) => family.code)).toContain("MW-20");
    expect(rest.body.next).toBeNull();
  });

  it("gives one with its revisions, in any case and by id", async () => {
    const { status, body } = await api.call("GET", "/families/mw-20", { as: "service" });
    expect(status).toBe(200);
    expect(body.revisions).toHaveLength(1);
    expect((await api.call("GET", `/families/${body.id}`, { as: "service" })).body.code).toBe("MW-20");
    const missing = await api.call("GET", "/families/NONE", { as: "service" });
    expect([missing.status, missing.body.code]).toEqual([404, "family.not_found"]);
    expect((await api.call("GET", "/families", { as: "operator" })).status).toBe(403);
  });
});

describe("publishing a revision", () => {
  it("goes from draft over review to published, and records who signed", async () => {
    await create("PUB");
    expect((await decide("PUB")).body.code).toBe("family.wrong_state");
    expect((await submit("PUB")).body.state).toBe("in-review");
    expect((await submit("PUB")).status).toBe(409);
    const { status, body } = await decide("PUB");
    expect([status, body.state]).toEqual([200, "published"]);
    expect(body.decisions).toMatchObject([{ decision: "approve", name: "reviewer" }]);
    expect((await decide("PUB")).status).toBe(409);
    expect((await api.call("GET", "/families/PUB", { as: "auditor" })).body.revision).toBe(1);
  });

  it("is refused to whoever wrote it, and nothing is signed", async () => {
    await api.call("POST", "/families", { as: "engineer2", body: { ...golden, code: "OWN" } });
    await submit("OWN");
    const before = await countOf("approval");
    const { status, body } = await decide("OWN", { as: "engineer2" });
    expect([status, body.code]).toEqual([403, "family.self_approval"]);
    expect(await countOf("approval")).toBe(before);
  });

  it("asks for the right password, a session and the role", async () => {
    await create("SIGN");
    await submit("SIGN");
    const wrong = await decide("SIGN", { body: { ...approve, password: "wrong" } });
    expect([wrong.status, wrong.body.code]).toEqual([403, "auth.password_wrong"]);
    const bearer = await insertAccessKey(api.owner, api.people.reviewer.id);
    const byKey = await decide("SIGN", { as: { bearer } });
    expect([byKey.status, byKey.body.code]).toEqual([403, "auth.session_required"]);
    expect((await decide("SIGN", { as: "engineer" })).body.code).toBe("auth.forbidden");
    expect((await decide("SIGN", { as: undefined })).status).toBe(401);
    const { body } = await api.call("GET", "/families/SIGN", { as: "auditor" });
    expect(body.revisions[0]).toMatchObject({ state: "in-review", decisions: [] });
  });

  it("is refused with a reason, then a draft again", async () => {
    await create("REF");
    await submit("REF");
    const silent = await decide("REF", { body: { ...approve, decision: "refuse" } });
    expect([silent.status, silent.body.errors[0].path]).toEqual([422, "/reason"]);
    const { body } = await decide("REF", { body: { ...approve, decision: "refuse", reason: "Soak is too short." } });
    expect(body).toMatchObject({ state: "draft", decisions: [{ decision: "refuse", reason: "Soak is too short." }] });
    expect((await submit("REF")).body.state).toBe("in-review");
    expect((await decide("REF")).body.state).toBe("published");
  });

  it("is taken back by who asked only", async () => {
    await create("BACK");
    await submit("BACK");
    const path = "/families/BACK/revisions/1/take-back";
    expect((await api.call("POST", path, { as: "engineer2" })).status).toBe(403);
    expect((await api.call("POST", path, { as: "engineer" })).body.state).toBe("draft");
    expect((await api.call("POST", path, { as: "engineer" })).body.code).toBe("family.wrong_state");
  });

  it("lets one of two simultaneous reviewers win", async () => {
    await create("RACE");
    await submit("RACE");
    const before = Number(await countOf("approval"));
    const results = await Promise.all([decide("RACE"), decide("RACE", { as: "reviewer2" })]);
    expect(results.map((result) => result.status).sort()).toEqual([200, 409]);
    expect(Number(await countOf("approval"))).toBe(before + 1);
  });

  it("names a revision that is not there", async () => {
    await create("FEW");
    const { status, body } = await submit("FEW", 7);
    expect([status, body.code]).toEqual([404, "family-revision.not_found"]);
    expect((await submit("NONE")).body.code).toBe("family.not_found");
  });
});

describe("POST /families/{code}/revisions", () => {
  it("adds the next number as a draft and leaves the published one alone", async () => {
    await create("REV");
    await submit("REV");
    await decide("REV");
    const body = { ...golden, code: "REV", capacityKg: 30 };
    const added = await api.call("POST", "/families/REV/revisions", { as: "engineer2", body });
    expect([added.status, added.body.revision, added.body.state]).toEqual([201, 2, "draft"]);
    const family = (await api.call("GET", "/families/REV", { as: "auditor" })).body;
    expect(family).toMatchObject({ revision: 1, newestRevision: 2, state: "draft", capacityKg: 30 });
    expect(family.revisions.map((revision: { number: number }) => revision.number)).toEqual([2, 1]);
  });

  it("keeps the family's code", async () => {
    await create("KEEP");
    const { status, body } = await api.call("POST", "/families/KEEP/revisions", { as: "engineer", body: golden });
    expect([status, body.code]).toEqual([422, "family.code_differs"]);
  });

  it("numbers simultaneous revisions one after the other", async () => {
    await create("BOTH");
    const body = { ...golden, code: "BOTH" };
    const add = () => api.call("POST", "/families/BOTH/revisions", { as: "engineer", body });
    const added = await Promise.all([add(), add(), add()]);
    expect(added.map((reply) => reply.body.revision).sort()).toEqual([2, 3, 4]);
  });
});
