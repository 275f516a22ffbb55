import { v7 as uuidv7 } from "uuid";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { documentDigest } from "@/lib/services/families/document-digest";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { publishFamily, publishLayout } from "../support/scenario/family-lot";
import { firstGolden, secondGolden } from "../support/scenario/golden";

let api: TestApi;
const { family, layout: source } = firstGolden();
const document = JSON.parse(source) as LayoutDocument;
const path = "/families/MW-20/layouts";
const approve = { decision: "approve", password: PASSWORD };
const json = { "content-type": "application/json" };

beforeAll(async () => {
  api = await openTestApi();
  const at = new Date();
  const grant = { id: uuidv7(), personId: api.people.engineer2.id, role: "reviewer", askedAt: at, confirmedAt: at };
  await api.owner.insertInto("roleGrant").values(grant).execute();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  await publishFamily(people, family);
  await publishFamily(people, secondGolden().family);
  await publishLayout(people, source);
});
afterAll(() => api.close());

/** The golden layout in another version, with one constant of a byte where fill was. */
function next(version: string, change: Partial<LayoutDocument> = {}): LayoutDocument {
  const spare = { name: "spare", at: 64, type: "u8", value: { const: 1 } } as const;
  return { ...document, version, fields: [...document.fields, spare], ...change };
}

const create = (body: unknown, as: "engineer" | "engineer2" | "reviewer" = "engineer") =>
  api.call("POST", path, { as, body });
const act = (version: string, name: string, as: Parameters<TestApi["call"]>[2] = {}) =>
  api.call("POST", `${path}/${version}/${name}`, { as: "engineer", ...as });
const decide = (version: string, options: Parameters<TestApi["call"]>[2] = {}) =>
  act(version, "decisions", { as: "reviewer", body: approve, ...options });
const layouts = () =>
  api.owner.selectFrom("layout").select(["version", "state", "draftNumber"]).orderBy("version").execute();

describe("POST …/layouts/lint", () => {
  const lint = (body: unknown) => api.call("POST", `${path}/lint`, { as: "engineer", body });

  it("answers errors, warnings and the computed step, and stores nothing", async () => {
    const before = await layouts();
    expect((await lint(next("1.1.0"))).body).toMatchObject({ errors: [], step: "minor" });
    const moved = {
      ...document,
      version: "2.0.0",
      fields: document.fields.map((field) => (field.name === "zero" ? { ...field, at: 64 } : field)),
    };
    expect((await lint(moved)).body.step).toBe("major");
    expect(await layouts()).toEqual(before);
  });

  it("is 200 for a document with everything wrong", async () => {
    const { status, body } = await lint({ format: "other" });
    expect(status).toBe(200);
    expect(body.step).toBeNull();
    expect(body.errors.length).toBeGreaterThan(0);
    for (const error of body.errors)
      expect(error).toEqual({ path: expect.any(String), code: expect.any(String), message: expect.any(String) });
  });

  it("is 400 for what is no JSON, 415 for another type, 404 for another family", async () => {
    const send = (body: string, headers: Record<string, string>) =>
      api.call("POST", `${path}/lint`, { as: "engineer", body, headers });
    expect((await send("{", json)).body.code).toBe("request.malformed");
    expect((await send("{}", { "content-type": "text/plain" })).status).toBe(415);
    expect((await api.call("POST", "/families/NONE/layouts/lint", { as: "engineer", body: document })).status).toBe(
      404,
    );
  });
});

describe("POST …/layouts", () => {
  it("adds a draft, keeps the author's text and hashes the document", async () => {
    const text = JSON.stringify(next("1.1.0"), null, 3);
    const { status, body } = await api.call("POST", path, { as: "engineer", body: text, headers: json });
    expect(status).toBe(201);
    expect(body).toMatchObject({
      version: "1.1.0",
      state: "draft",
      step: "minor",
      draft: 1,
      makers: ["engineer"],
      source: text,
    });
    expect(body.sha256).toBe(documentDigest(next("1.1.0")).toString("hex"));
  });

  it("answers 409 for a version that is there, draft or published", async () => {
    for (const version of ["1.0.0", "1.1.0"]) {
      const { status, body } = await create(next(version));
      expect([status, body.code]).toEqual([409, "layout.exists"]);
    }
  });

  it("answers 422 with lint's errors and stores nothing", async () => {
    const before = await layouts();
    const overlapping = next("1.2.0", {
      fields: [...document.fields, { name: "clash", at: 48, type: "u8", value: { const: 1 } }],
    });
    const { status, body } = await create(overlapping);
    expect([status, body.code]).toEqual([422, "layout.invalid"]);
    expect(body.errors.length).toBeGreaterThan(0);
    const otherFamily = await create({ ...next("1.2.0"), family: "MW-300" });
    expect(otherFamily.body.errors.map((error: { path: string }) => error.path)).toContain("/family");
    expect((await create({})).status).toBe(422);
    expect(await layouts()).toEqual(before);
  });

  it("refuses a step smaller than the differences ask for", async () => {
    const { status, body } = await create(next("1.0.1"));
    expect(status).toBe(422);
    expect(body.errors).toMatchObject([{ path: "/version", code: "layout.step_too_small" }]);
  });

  it("is for engineers", async () => {
    expect((await create(next("1.9.0"), "reviewer")).status).toBe(403);
    expect((await api.call("POST", path, { body: next("1.9.0") })).status).toBe(401);
    expect((await api.call("POST", "/families/NONE/layouts", { as: "engineer", body: document })).status).toBe(404);
  });

  it("lets one of two simultaneous authors have a version", async () => {
    const results = await Promise.all([create(next("1.8.0")), create(next("1.8.0"), "engineer2")]);
    expect(results.map((result) => result.status).sort()).toEqual([201, 409]);
  });
});

describe("GET …/layouts", () => {
  it("lists the newest written first and gives one", async () => {
    const { body } = await api.call("GET", path, { as: "auditor", query: { limit: 2 } });
    expect(body.items.map((layout: { version: string }) => layout.version)).toEqual(["1.8.0", "1.1.0"]);
    const rest = await api.call("GET", path, { as: "auditor", query: { cursor: body.next } });
    expect(rest.body.items.map((layout: { version: string }) => layout.version)).toEqual(["1.0.0"]);
    const one = await api.call("GET", `${path}/1.0.0`, { as: "auditor" });
    expect(one.body).toMatchObject({ state: "published", source, document });
    expect((await api.call("GET", `${path}/7.0.0`, { as: "auditor" })).body.code).toBe("layout.not_found");
    expect((await api.call("GET", `${path}/latest`, { as: "auditor" })).status).toBe(422);
  });
});

describe("PUT and DELETE …/layouts/{version}", () => {
  const save = (version: string, body: unknown, options: Parameters<TestApi["call"]>[2] = {}) =>
    api.call("PUT", `${path}/${version}`, { as: "engineer", body, ...options });

  it("saves a draft, and whoever saves it becomes a maker", async () => {
    await create(next("1.3.0"));
    const { status, body } = await save("1.3.0", next("1.3.0", { description: "with a text" }), {
      as: "engineer2",
      query: { draft: 1 },
    });
    expect([status, body.draft, body.makers]).toEqual([200, 2, ["engineer", "engineer2"]]);
    expect(body.document.description).toBe("with a text");
  });

  it("refuses to save over somebody else's save, by ?draft= or If-Match", async () => {
    const old = await save("1.3.0", next("1.3.0"), { query: { draft: 1 } });
    expect([old.status, old.body.code, old.body.now]).toEqual([409, "layout.draft_changed", 2]);
    expect(JSON.parse(old.body.source).description).toBe("with a text");
    expect(old.body.updatedBy).toBe("engineer2");
    expect((await save("1.3.0", next("1.3.0"), { headers: { "if-match": '"1"' } })).status).toBe(409);
    expect((await save("1.3.0", next("1.3.0"), { headers: { "if-match": "abc" } })).status).toBe(422);
    expect((await save("1.3.0", next("1.3.0"), { headers: { "if-match": '"2"' } })).body.draft).toBe(3);
    expect((await save("1.3.0", next("1.3.0"))).body.draft).toBe(4);
  });

  it("keeps the version, and takes no errors in", async () => {
    expect((await save("1.3.0", next("1.4.0"))).body.code).toBe("layout.version_differs");
    expect((await save("1.3.0", { ...next("1.3.0"), order: 2 })).body.code).toBe("layout.invalid");
    expect((await save("1.7.0", next("1.7.0"))).status).toBe(404);
  });

  it("leaves what is in review or published alone", async () => {
    await create(next("1.5.0"));
    await act("1.5.0", "submit");
    for (const version of ["1.0.0", "1.5.0"]) {
      expect((await save(version, next(version))).body.code).toBe("layout.wrong_state");
      const dropped = await api.call("DELETE", `${path}/${version}`, { as: "engineer" });
      expect([dropped.status, dropped.body.code]).toEqual([409, "layout.wrong_state"]);
    }
  });

  it("drops a draft", async () => {
    await create(next("1.6.0"));
    expect((await api.call("DELETE", `${path}/1.6.0`, { as: "reviewer" })).status).toBe(403);
    expect((await api.call("DELETE", `${path}/1.6.0`, { as: "engineer" })).status).toBe(204);
    expect((await api.call("GET", `${path}/1.6.0`, { as: "engineer" })).status).toBe(404);
  });
});

describe("PUT …/layouts/{version}/text", () => {
  const keep = (version: string, text: string | Uint8Array, options: Parameters<TestApi["call"]>[2] = {}) =>
    api.call("PUT", `${path}/${version}/text`, {
      as: "engineer",
      body: text,
      headers: { "content-type": "text/plain" },
      ...options,
    });
  const read = async (version: string) => (await api.call("GET", `${path}/${version}`, { as: "auditor" })).body;
  const text = (change: Partial<LayoutDocument> = {}) => JSON.stringify(next("1.20.0", change), null, 2);
  const savedEvents = async () =>
    (await api.owner.selectFrom("ledgerEvent").select("action").where("action", "=", "layout.saved").execute()).length;

  it("keeps half a thought, and the last document without errors beside it", async () => {
    await create(next("1.20.0"));
    const half = `${text()}, and then`;
    const { status, body } = await keep("1.20.0", half, { query: { draft: 1 } });
    expect([status, body.draft, body.unfinished]).toEqual([200, 2, true]);
    expect(await read("1.20.0")).toMatchObject({ source: half, unfinished: true, document: next("1.20.0") });
    expect((await act("1.20.0", "submit")).body.code).toBe("layout.unfinished");
    expect((await read("1.20.0")).state).toBe("draft");
  });

  it("makes a text without errors the draft's document", async () => {
    const described = text({ description: "whole again" });
    const { body } = await keep("1.20.0", described, { query: { draft: 2 } });
    expect(body).toMatchObject({ draft: 3, unfinished: false });
    const stored = await read("1.20.0");
    expect(stored).toMatchObject({ source: described, unfinished: false });
    expect(stored.sha256).toBe(documentDigest(JSON.parse(described)).toString("hex"));
    expect(body.sha256).toBe(stored.sha256);
  });

  it("counts the same text again as nothing new", async () => {
    const again = await keep("1.20.0", text({ description: "whole again" }), { query: { draft: 3 } });
    expect([again.status, again.body.draft]).toEqual([200, 3]);
  });

  it("takes another version or family in the text as unfinished, not as a rename", async () => {
    expect((await keep("1.20.0", JSON.stringify(next("1.21.0")), { query: { draft: 3 } })).body.unfinished).toBe(true);
    expect((await read("1.20.0")).version).toBe("1.20.0");
    const other = JSON.stringify({ ...next("1.20.0"), family: "MW-300" });
    expect((await keep("1.20.0", other, { query: { draft: 4 } })).body).toMatchObject({ draft: 5, unfinished: true });
  });

  it("loses neither text when two people write one draft at once", async () => {
    const mine = text({ description: "mine" });
    const theirs = text({ description: "theirs" });
    const results = await Promise.all([
      keep("1.20.0", mine, { headers: { "content-type": "text/plain", "if-match": '"5"' } }),
      keep("1.20.0", theirs, { as: "engineer2", query: { draft: 5 } }),
    ]);
    expect(results.map(({ status }) => status).sort()).toEqual([200, 409]);
    const refused = results.find(({ status }) => status === 409)?.body;
    const { source } = await read("1.20.0");
    expect([mine, theirs]).toContain(source);
    expect(refused).toMatchObject({ code: "layout.draft_changed", draft: 5, now: 6, source });
  });

  it("makes a writer a maker, and names them in the ledger once", async () => {
    const before = await savedEvents();
    await create(next("1.22.0"));
    const save = (draft: number, as: "engineer" | "engineer2") =>
      keep("1.22.0", JSON.stringify(next("1.22.0", { description: `draft ${draft}` })), { as, query: { draft } });
    await save(1, "engineer");
    await save(2, "engineer2");
    await save(3, "engineer2");
    expect((await read("1.22.0")).makers).toEqual(["engineer", "engineer2"]);
    expect(await savedEvents()).toBe(before + 1);
    await act("1.22.0", "submit");
    expect((await decide("1.22.0", { as: "engineer2" })).body.code).toBe("layout.self_approval");
  });

  it("refuses what can't be kept, and whoever may not, and writes nothing", async () => {
    const before = await read("1.20.0");
    const stale = { query: { draft: before.draft } };
    expect((await keep("1.20.0", "{}")).body.code).toBe("request.invalid");
    expect((await keep("1.20.0", "a\0b", stale)).body.code).toBe("request.invalid");
    expect((await keep("1.20.0", new Uint8Array([0xff, 0xfe]), stale)).body.code).toBe("request.malformed");
    expect((await keep("1.20.0", "x".repeat(1024 * 1024 + 1), stale)).status).toBe(413);
    expect((await keep("1.20.0", "{}", { ...stale, headers: { "content-type": "text/html" } })).status).toBe(415);
    expect((await keep("1.0.0", "{}", { query: { draft: 1 } })).body.code).toBe("layout.wrong_state");
    expect((await keep("9.0.0", "{}", { query: { draft: 1 } })).status).toBe(404);
    expect((await keep("1.20.0", "{}", { ...stale, as: "reviewer" })).status).toBe(403);
    expect(await read("1.20.0")).toEqual(before);
  });
});

describe("GET …/layouts/{version}/use", () => {
  it("is empty before anything was built, and 404 for what is not there", async () => {
    const { status, body } = await api.call("GET", `${path}/1.0.0/use`, { as: "auditor" });
    expect([status, body]).toEqual([200, { items: [], next: null }]);
    expect((await api.call("GET", `${path}/7.7.7/use`, { as: "auditor" })).status).toBe(404);
  });
});

describe("publishing a layout", () => {
  it("is refused to everyone who wrote it", async () => {
    expect((await act("1.3.0", "submit")).body.state).toBe("in-review");
    const own = await decide("1.3.0", { as: "engineer2" });
    expect([own.status, own.body.code]).toEqual([403, "layout.self_approval"]);
    expect((await decide("1.3.0", { body: { ...approve, password: "wrong" } })).body.code).toBe("auth.password_wrong");
    expect((await decide("1.3.0", { as: "engineer" })).body.code).toBe("auth.forbidden");
    expect((await layouts()).find((layout) => layout.version === "1.3.0")?.state).toBe("in-review");
  });

  it("is taken back by who asked, refused with a reason, and signed by a second person", async () => {
    expect((await act("1.3.0", "take-back", { as: "engineer2" })).status).toBe(403);
    expect((await act("1.3.0", "take-back")).body.state).toBe("draft");
    await act("1.3.0", "submit");
    const refused = await decide("1.3.0", {
      body: { decision: "refuse", reason: "Why a spare byte?", password: PASSWORD },
    });
    expect(refused.body).toMatchObject({
      state: "draft",
      decisions: [{ decision: "refuse", reason: "Why a spare byte?" }],
    });
    await act("1.3.0", "submit");
    const { status, body } = await decide("1.3.0");
    expect([status, body.state]).toEqual([200, "published"]);
    expect((await decide("1.3.0")).body.code).toBe("layout.wrong_state");
  });

  it("asks for the step again at submit and at the decision, as another version may have come in between", async () => {
    const more = { name: "more", at: 66, type: "u8", value: { const: 2 } } as const;
    const withMore = (version: string) => next(version, { fields: [...next(version).fields, more] });
    // Against 1.3.0 both are texts only; once 1.4.0 is published they leave its field out, which asks for a major step.
    await create(next("1.4.1", { description: "a text" }));
    await create(next("1.4.2", { description: "a text" }));
    expect((await act("1.4.2", "submit")).body.state).toBe("in-review");
    await create(withMore("1.4.0"));
    await act("1.4.0", "submit");
    expect((await decide("1.4.0")).body.state).toBe("published");

    const submitted = await act("1.4.1", "submit");
    expect([submitted.status, submitted.body.errors[0].code]).toEqual([422, "layout.step_too_small"]);
    const decided = await decide("1.4.2");
    expect([decided.status, decided.body.errors[0].code]).toEqual([422, "layout.step_too_small"]);
    const { body } = await api.call("GET", `${path}/1.4.2`, { as: "auditor" });
    expect(body).toMatchObject({ state: "in-review", decisions: [] });
    await create(withMore("1.4.3"));
    await act("1.4.3", "submit");
  });

  it("lets one of two simultaneous reviewers win", async () => {
    const results = await Promise.all([decide("1.4.3"), decide("1.4.3", { as: "reviewer2" })]);
    expect(results.map((result) => result.status).sort()).toEqual([200, 409]);
  });
});

describe("POST …/layouts/{version}/retire", () => {
  it("takes a published layout out of use, once", async () => {
    expect((await act("1.1.0", "retire", { body: {} })).body.code).toBe("layout.wrong_state");
    expect((await act("1.3.0", "retire", { as: "auditor", body: {} })).status).toBe(403);
    const { status, body } = await act("1.3.0", "retire", { body: { reason: "1.4.0 takes its place" } });
    expect([status, body.state]).toEqual([200, "retired"]);
    expect((await act("1.3.0", "retire", { body: {} })).body.code).toBe("layout.wrong_state");
  });
});
