import { beforeAll, describe, expect, it } from "vitest";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, arrangeSubmitted, type BuiltPackage } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let first: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  first = await arrangeDerived(people);
});

const post = (id: string, what: string, as: PersonName, body?: object) =>
  api.call("POST", `/packages/${id}/${what}`, { as, ...(body && { body }) });
const get = async ({ id }: BuiltPackage) => (await api.call("GET", `/packages/${id}`, { as: "reviewer" })).body;
const decide = (id: string, reviewDigest: string, as: PersonName = "reviewer", change: object = {}) =>
  post(id, "decisions", as, { decision: "approve", reviewDigest, password: PASSWORD, ...change });
const eventsOf = async (id: string) =>
  (await api.db.selectFrom("ledgerEvent").select("action").where("subject", "=", id).orderBy("seq").execute()).map(
    (event) => event.action,
  );
const approvalsOf = (id: string) =>
  api.db.selectFrom("approval").select(["decision", "personId"]).where("subjectId", "=", id).execute();

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
