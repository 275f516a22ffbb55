import { beforeAll, describe, expect, it } from "vitest";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeSubmitted, type BuiltPackage, buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
/** Builds without a warning. */
let first: DerivedLot;
/** One device is excluded: the check coverage warns. */
let second: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  first = await arrangeDerived(people);
  second = await arrangeSecondDerived(people);
});

const post = (id: string, what: string, as: PersonName, body?: object) =>
  api.call("POST", `/packages/${id}/${what}`, { as, ...(body && { body }) });
const get = async ({ id }: BuiltPackage) => (await api.call("GET", `/packages/${id}`, { as: "reviewer" })).body;
const waive = (id: string, as: PersonName = "reviewer", change: object = {}) =>
  post(id, "waivers", as, { check: "coverage", reason: "Excluded on purpose", password: PASSWORD, ...change });
const decide = (id: string, reviewDigest: string, as: PersonName = "reviewer", change: object = {}) =>
  post(id, "decisions", as, { decision: "approve", reviewDigest, password: PASSWORD, ...change });
const eventsOf = async (id: string) =>
  (await api.db.selectFrom("ledgerEvent").select("action").where("subject", "=", id).orderBy("seq").execute()).map(
    (event) => event.action,
  );

describe("waivers", () => {
  it("let a package with a warning be submitted", async () => {
    const built = await buildGolden(people, second);
    expect(await post(built.id, "submit", "engineer")).toMatchObject({
      status: 409,
      body: { code: "package.not_waived", checks: ["coverage"] },
    });
    const before = await get(built);
    const waived = await waive(built.id);
    expect(waived).toMatchObject({
      status: 201,
      body: { state: "draft", waivers: [{ check: "coverage", by: "reviewer", reason: "Excluded on purpose" }] },
    });
    expect(waived.body.reviewDigest).not.toBe(before.reviewDigest);
    expect(await post(built.id, "submit", "engineer")).toMatchObject({ status: 200, body: { state: "in-review" } });
    expect(await eventsOf(built.id)).toEqual([
      "package.build-started",
      "package.built",
      "package.check-waived",
      "package.submitted",
    ]);
  });

  it("are for a signed-in reviewer with the password and a reason, who is no maker", async () => {
    const built = await buildGolden(people, second);
    expect((await api.call("POST", `/packages/${built.id}/waivers`, { body: {} })).status).toBe(401);
    expect(await waive(built.id, "engineer")).toMatchObject({ status: 403, body: { code: "auth.forbidden" } });
    expect(await waive(built.id, "reviewer", { password: "wrong" })).toMatchObject({
      status: 403,
      body: { code: "auth.password_wrong" },
    });
    const bearer = await insertAccessKey(api.owner, api.people.reviewer2.id);
    const byKey = { as: { bearer }, body: { check: "coverage", reason: "x", password: PASSWORD } };
    expect(await api.call("POST", `/packages/${built.id}/waivers`, byKey)).toMatchObject({
      status: 403,
      body: { code: "auth.session_required" },
    });
    expect((await waive(built.id, "reviewer", { reason: " " })).status).toBe(422);
    await addMaker(built.id, "reviewer2", "uploaded");
    expect(await waive(built.id, "reviewer2")).toMatchObject({ status: 403, body: { code: "package.self_approval" } });
    expect((await get(built)).waivers).toEqual([]);
  });

  it("are only for a warning of a draft, once", async () => {
    const built = await buildGolden(people, second);
    expect(await waive(built.id, "reviewer", { check: "no-such" })).toMatchObject({
      status: 404,
      body: { code: "check.not_found" },
    });
    expect(await waive(built.id, "reviewer", { check: "limits" })).toMatchObject({
      status: 422,
      body: { code: "check.not_waivable", verdict: "pass" },
    });
    const both = await Promise.all([waive(built.id), waive(built.id, "reviewer2")]);
    expect(both.map((reply) => reply.status).sort()).toEqual([201, 409]);
    await post(built.id, "submit", "engineer");
    expect(await waive(built.id)).toMatchObject({ status: 409, body: { code: "package.wrong_state" } });
    expect((await get(built)).waivers).toHaveLength(1);
  });

  async function addMaker(packageId: string, name: PersonName, act: string) {
    const { newId, now } = api.ctx(name);
    const row = {
      id: newId(),
      subjectKind: "package",
      subjectId: packageId,
      personId: api.people[name].id,
      act,
      at: now(),
    };
    await api.db.insertInto("maker").values(row).execute();
  }
});

describe("submitting and taking back", () => {
  it("moves a draft into review and back, by who submitted it", async () => {
    const built = await buildGolden(people, first);
    const submitted = await post(built.id, "submit", "engineer2");
    expect(submitted).toMatchObject({ status: 200, body: { state: "in-review", submittedBy: "engineer2" } });
    expect(submitted.body.makers).toContainEqual(expect.objectContaining({ name: "engineer2", act: "submitted" }));
    expect(await post(built.id, "submit", "engineer")).toMatchObject({
      status: 409,
      body: { code: "package.wrong_state" },
    });
    expect(await post(built.id, "take-back", "engineer")).toMatchObject({
      status: 403,
      body: { code: "auth.forbidden" },
    });
    expect(await post(built.id, "take-back", "engineer2")).toMatchObject({
      status: 200,
      body: { state: "draft", submittedBy: null },
    });
    expect(await post(built.id, "take-back", "engineer2")).toMatchObject({ status: 409 });
    expect(await post(built.id, "submit", "engineer2")).toMatchObject({ status: 200 });
    const makers = (await get(built)).makers.filter((one: { act: string }) => one.act === "submitted");
    expect(makers).toHaveLength(1);
  });

  it("is an engineer's, with a key too", async () => {
    const built = await buildGolden(people, first);
    expect((await api.call("POST", `/packages/${built.id}/submit`)).status).toBe(401);
    expect((await post(built.id, "submit", "reviewer")).status).toBe(403);
    expect((await post(built.id, "take-back", "reviewer")).status).toBe(403);
    const bearer = await insertAccessKey(api.owner, api.people.engineer.id);
    expect((await api.call("POST", `/packages/${built.id}/submit`, { as: { bearer } })).status).toBe(200);
    const missing = "0190b0f0-0000-7000-8000-000000000000";
    expect((await post(missing, "submit", "engineer")).status).toBe(404);
    expect((await post(missing, "take-back", "engineer")).status).toBe(404);
  });

  it("refuses a package with a failed check", async () => {
    const { body } = await api.call("POST", `/lots/${first.lot}/packages`, {
      as: "engineer",
      body: { layout: "1.0.0" },
    });
    // The owner alone can arrange it: a package that fails its checks is not what the builder makes of good inputs.
    const check = { packageId: body.id, position: 90, code: "arranged", verdict: "fail", message: "Arranged" };
    await api.db.insertInto("packageCheck").values(check).execute();
    await api.runJobs();
    expect(await post(body.id, "submit", "engineer")).toMatchObject({
      status: 409,
      body: { code: "package.check_failed", checks: ["arranged"] },
    });
  });

  it("refuses coefficients that were revoked since the build", async () => {
    const built = await buildGolden(people, second);
    const submitted = await arrangeSubmitted(people, second);
    const { reviewDigest } = await get(submitted);
    await waive(built.id);
    await api.call("POST", `/derivations/${second.derivation}/decisions`, {
      as: "reviewer",
      body: { decision: "revoke", serials: ["MW300-2610-00014"], reason: "Wrong load", password: PASSWORD },
    });
    expect(await post(built.id, "submit", "engineer")).toMatchObject({
      status: 409,
      body: { code: "package.sets_lapsed", serials: ["MW300-2610-00014"] },
    });
    expect(await decide(submitted.id, reviewDigest)).toMatchObject({
      status: 409,
      body: { code: "package.sets_lapsed" },
    });
  });
});
