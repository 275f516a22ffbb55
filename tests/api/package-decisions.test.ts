import { beforeAll, describe, expect, it } from "vitest";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, arrangeSubmitted, type BuiltPackage, buildGolden } from "../support/scenario/packaged";

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
const approvalsOf = (id: string) =>
  api.db.selectFrom("approval").select(["decision", "personId"]).where("subjectId", "=", id).execute();

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

describe("decisions", () => {
  it("approve what was seen, with the signature on record", async () => {
    const submitted = await arrangeSubmitted(people, first);
    const { reviewDigest, mayDecide } = await get(submitted);
    expect(mayDecide).toBe(true);
    const reply = await decide(submitted.id, reviewDigest);
    expect(reply).toMatchObject({
      status: 200,
      body: {
        state: "approved",
        reviewDigest,
        approvals: [{ decision: "approve", name: "reviewer", digest: reviewDigest }],
      },
    });
    expect(reply.body.approvals[0].meaning).toContain(`package ${submitted.version} of lot ${first.lot}`);
    expect(await eventsOf(submitted.id)).toContain("package.approved");
  });

  it("refuse with a reason, and end there", async () => {
    const submitted = await arrangeSubmitted(people, first);
    const { reviewDigest } = await get(submitted);
    expect((await decide(submitted.id, reviewDigest, "reviewer", { decision: "refuse" })).status).toBe(422);
    const refused = await decide(submitted.id, reviewDigest, "reviewer", {
      decision: "refuse",
      reason: "Too many left out",
    });
    expect(refused).toMatchObject({ status: 200, body: { state: "refused" } });
    for (const [what, as] of [
      ["submit", "engineer"],
      ["take-back", "engineer"],
    ] as const) {
      expect((await post(submitted.id, what, as)).body.code).toBe("package.wrong_state");
    }
    expect((await decide(submitted.id, reviewDigest)).body.code).toBe("package.wrong_state");
  });

  it("are one where two reviewers decide at the same moment", async () => {
    const submitted = await arrangeSubmitted(people, first);
    const { reviewDigest } = await get(submitted);
    const replies = await Promise.all([
      decide(submitted.id, reviewDigest, "reviewer"),
      decide(submitted.id, reviewDigest, "reviewer2"),
    ]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 409]);
    expect(await approvalsOf(submitted.id)).toHaveLength(1);
  });

  it("are refused to whoever had a hand in it, and to everybody but signed-in reviewers", async () => {
    await grantReviewer("engineer");
    const submitted = await arrangeSubmitted(people, first);
    const { reviewDigest } = await get(submitted);
    expect(await decide(submitted.id, reviewDigest, "engineer")).toMatchObject({
      status: 403,
      body: { code: "package.self_approval" },
    });
    expect((await api.call("GET", `/packages/${submitted.id}`, { as: "engineer" })).body).toMatchObject({
      mayDecide: false,
      isMaker: true,
      reviewers: ["reviewer", "reviewer2"],
    });
    expect((await api.call("POST", `/packages/${submitted.id}/decisions`, { body: {} })).status).toBe(401);
    for (const as of ["engineer2", "operator", "auditor", "admin"] as const) {
      expect(await decide(submitted.id, reviewDigest, as)).toMatchObject({
        status: 403,
        body: { code: "auth.forbidden" },
      });
    }
    expect(await decide(submitted.id, reviewDigest, "reviewer", { password: "wrong" })).toMatchObject({
      status: 403,
      body: { code: "auth.password_wrong" },
    });
    const bearer = await insertAccessKey(api.owner, api.people.reviewer.id);
    const byKey = { as: { bearer }, body: { decision: "approve", reviewDigest, password: PASSWORD } };
    expect(await api.call("POST", `/packages/${submitted.id}/decisions`, byKey)).toMatchObject({
      status: 403,
      body: { code: "auth.session_required" },
    });
    expect(await approvalsOf(submitted.id)).toEqual([]);
    expect((await get(submitted)).state).toBe("in-review");
  });

  it("name what was seen: another digest is refused, and so is one from before the change", async () => {
    const submitted = await arrangeSubmitted(people, first);
    const seen = (await get(submitted)).reviewDigest;
    expect(await decide(submitted.id, "0".repeat(64))).toMatchObject({
      status: 409,
      body: { code: "package.changed", reviewDigest: seen },
    });
    expect((await decide(submitted.id, "short")).status).toBe(422);
    // Another package goes live meanwhile: what this one is compared with is another.
    const live = await arrangeReleased(people, first);
    const now = await get(submitted);
    expect(now).toMatchObject({ against: { id: live.id, version: live.version } });
    expect(now.reviewDigest).not.toBe(seen);
    expect(await decide(submitted.id, seen)).toMatchObject({
      status: 409,
      body: { code: "package.changed", reviewDigest: now.reviewDigest },
    });
    expect(await approvalsOf(submitted.id)).toEqual([]);
    expect(await decide(submitted.id, now.reviewDigest)).toMatchObject({ status: 200, body: { state: "approved" } });
  });

  it("are asked anew after the package was taken back", async () => {
    const submitted = await arrangeSubmitted(people, first);
    const { reviewDigest } = await get(submitted);
    await decide(submitted.id, reviewDigest);
    expect(await post(submitted.id, "take-back", "engineer2")).toMatchObject({ status: 200, body: { state: "draft" } });
    expect(await decide(submitted.id, reviewDigest)).toMatchObject({
      status: 409,
      body: { code: "package.wrong_state" },
    });
    await post(submitted.id, "submit", "engineer");
    const release = await post(submitted.id, "release", "engineer", { password: PASSWORD });
    expect(release).toMatchObject({ status: 409, body: { code: "package.wrong_state" } });
  });

  it("answer for a package that is not there", async () => {
    const missing = "0190b0f0-0000-7000-8000-000000000000";
    expect(await decide(missing, "0".repeat(64))).toMatchObject({ status: 404, body: { code: "package.not_found" } });
  });

  async function grantReviewer(name: PersonName) {
    const { newId, now } = api.ctx(name);
    await api.owner
      .insertInto("roleGrant")
      .values({ id: newId(), personId: api.people[name].id, role: "reviewer", askedAt: now(), confirmedAt: now() })
      .execute();
  }
});
