import { verify } from "node:crypto";
import { beforeAll, describe, expect, it } from "vitest";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, type BuiltPackage, buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let lot: DerivedLot;
let older: BuiltPackage;
let live: BuiltPackage;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = await arrangeDerived(people);
  older = await arrangeReleased(people, lot);
  live = await arrangeReleased(people, lot);
});

let people: ScenarioPeople;

const ask = (target: BuiltPackage, as: PersonName = "engineer", change: object = {}) =>
  api.call("POST", `/lots/${lot.lot}/reinstatements`, {
    as,
    body: { package: target.id, reason: "The new one drifts", password: PASSWORD, ...change },
  });
const decide = (id: string, as: PersonName = "reviewer", change: object = {}) =>
  api.call("POST", `/reinstatements/${id}/decisions`, {
    as,
    body: { decision: "approve", password: PASSWORD, ...change },
  });
const refuse = (id: string) => decide(id, "reviewer", { decision: "refuse", reason: "Not needed" });
const stateOf = async ({ id }: BuiltPackage) =>
  (await api.call("GET", `/packages/${id}`, { as: "auditor" })).body.state;
const sequence = async () => (await api.call("GET", `/lots/${lot.lot}`, { as: "auditor" })).body.sequence;
const setHeld = (serial: string, held: boolean) =>
  api.db.updateTable("device").set({ held }).where("serial", "=", serial).execute();

describe("asking", () => {
  it("is for signed-in engineers and reviewers with a reason and the password", async () => {
    expect((await api.call("POST", `/lots/${lot.lot}/reinstatements`, { body: {} })).status).toBe(401);
    for (const as of ["operator", "service", "auditor", "admin"] as const)
      expect(await ask(older, as)).toMatchObject({ status: 403, body: { code: "auth.forbidden" } });
    expect(await ask(older, "engineer", { password: "wrong" })).toMatchObject({
      status: 403,
      body: { code: "auth.password_wrong" },
    });
    expect((await ask(older, "engineer", { reason: "" })).status).toBe(422);
    expect((await ask({ id: "0190b0f0-0000-7000-8000-000000000000", version: "" })).status).toBe(404);
    expect(await api.db.selectFrom("reinstatement").select("id").execute()).toEqual([]);
  });

  it("takes an earlier release only", async () => {
    expect(await ask(live)).toMatchObject({ status: 409, body: { code: "reinstatement.already_live" } });
    const draft = await buildGolden(people, lot);
    expect(await ask(draft)).toMatchObject({ status: 409, body: { code: "package.wrong_state" } });
    await api.call("POST", "/lots", { as: "engineer", body: { code: "OTHER", family: "MW-20", firmware: "2.3.0" } });
    const body = { package: older.id, reason: "x", password: PASSWORD };
    expect(await api.call("POST", "/lots/OTHER/reinstatements", { as: "engineer", body })).toMatchObject({
      status: 404,
      body: { code: "package.not_found" },
    });
    expect((await api.call("POST", "/lots/NO-LOT/reinstatements", { as: "engineer", body })).status).toBe(404);
  });

  it("stands open once a lot, until it is refused", async () => {
    const both = await Promise.all([ask(older), ask(older, "reviewer")]);
    expect(both.map((reply) => reply.status).sort()).toEqual([201, 409]);
    expect(both.find((reply) => reply.status === 409)?.body.code).toBe("reinstatement.exists");
    const asked = both.find((reply) => reply.status === 201)?.body;
    expect(asked).toMatchObject({ state: "asked", version: older.version, lot: lot.lot, approvals: [] });
    const by: PersonName = asked.askedBy === "reviewer" ? "reviewer2" : "reviewer";
    expect((await decide(asked.id, by, { decision: "refuse" })).status).toBe(422);
    expect(await decide(asked.id, by, { decision: "refuse", reason: "Not needed" })).toMatchObject({
      status: 200,
      body: { state: "refused", approvals: [{ decision: "refuse", reason: "Not needed" }] },
    });
    expect(await stateOf(older)).toBe("superseded");
  });

  it("is refused with what a new build would leave out: holds, revoked coefficients, other firmware", async () => {
    await setHeld("MW20-2609-00004", true);
    await api.db.updateTable("device").set({ firmware: "3.1.0" }).where("serial", "=", "MW20-2609-00006").execute();
    const blocked = await ask(older);
    expect(blocked).toMatchObject({ status: 409, body: { code: "reinstatement.blocked" } });
    expect(blocked.body.blocks).toMatchObject([
      { code: "held", serials: ["MW20-2609-00004"] },
      { code: "firmware", serials: ["MW20-2609-00006"] },
    ]);
    await setHeld("MW20-2609-00004", false);
    await api.db.updateTable("device").set({ firmware: null }).where("serial", "=", "MW20-2609-00006").execute();
  });
});

describe("deciding", () => {
  it("is another reviewer's, with the password; nothing goes live by a refusal of the call", async () => {
    const { body: asked } = await ask(older, "reviewer");
    const before = await sequence();
    expect(await decide(asked.id, "reviewer")).toMatchObject({
      status: 403,
      body: { code: "reinstatement.self_approval" },
    });
    expect((await api.call("POST", `/reinstatements/${asked.id}/decisions`, { body: {} })).status).toBe(401);
    expect((await decide(asked.id, "engineer")).status).toBe(403);
    expect(await decide(asked.id, "reviewer2", { password: "wrong" })).toMatchObject({ status: 403 });
    expect((await decide("0190b0f0-0000-7000-8000-000000000000")).status).toBe(404);
    expect(await sequence()).toBe(before);
    await decide(asked.id, "reviewer2", { decision: "refuse", reason: "Not needed" });
  });

  it("looks again at what stands against it", async () => {
    const { body: asked } = await ask(older);
    await setHeld("MW20-2609-00004", true);
    expect(await decide(asked.id)).toMatchObject({ status: 409, body: { code: "reinstatement.blocked" } });
    expect(await stateOf(older)).toBe("superseded");
    await setHeld("MW20-2609-00004", false);
    await refuse(asked.id);
  });

  it("makes the earlier release live again, once, with a record of its own", async () => {
    const { body: asked } = await ask(older);
    const before = await sequence();
    const replies = await Promise.all([decide(asked.id, "reviewer"), decide(asked.id, "reviewer2")]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 409]);
    expect(replies.find((reply) => reply.status === 409)?.body.code).toBe("reinstatement.wrong_state");
    expect(await sequence()).toBe(before + 1);
    expect([await stateOf(older), await stateOf(live)]).toEqual(["live", "superseded"]);
    const periods = await api.db
      .selectFrom("livePeriod")
      .selectAll()
      .where("packageId", "=", older.id)
      .orderBy("sequence")
      .execute();
    expect(periods.map((period) => period.kind)).toEqual(["release", "reinstatement"]);
    const bytes = periods[1]?.releaseDocument as Buffer;
    const record = JSON.parse(bytes.toString("utf8"));
    expect(record).toMatchObject({ kind: "reinstatement", sequence: before + 1, reason: "The new one drifts" });
    expect(record.approvals).toHaveLength(2);
    expect(record.approvals[1].meaning).toContain("goes live again");
    const key = await api.db.selectFrom("signingKey").select("publicPem").executeTakeFirstOrThrow();
    expect(verify(null, bytes, key.publicPem, periods[1]?.signature as Buffer)).toBe(true);
    expect(await decide(asked.id)).toMatchObject({ status: 409, body: { code: "reinstatement.wrong_state" } });
  });

  it("is in vain for a release that was withdrawn", async () => {
    const withdrawn = await api.call("POST", `/packages/${older.id}/withdraw`, {
      as: "reviewer",
      body: { password: PASSWORD },
    });
    expect(withdrawn.status).toBe(200);
    expect(await ask(older)).toMatchObject({ status: 409, body: { code: "reinstatement.withdrawn" } });
  });

  it("is refused once coefficients of the earlier release are revoked", async () => {
    const { body: asked } = await ask(live);
    await api.call("POST", `/derivations/${lot.derivation}/decisions`, {
      as: "reviewer",
      body: { decision: "revoke", serials: ["MW20-2609-00001"], reason: "Wrong load", password: PASSWORD },
    });
    const reply = await decide(asked.id);
    expect(reply).toMatchObject({ status: 409, body: { code: "reinstatement.blocked" } });
    expect(reply.body.blocks).toMatchObject([{ code: "sets", count: 1, serials: ["MW20-2609-00001"] }]);
  });
});

it("lists a lot's requests, newest first, to every reader", async () => {
  const { status, body } = await api.call("GET", `/lots/${lot.lot}/reinstatements`, { as: "auditor" });
  expect(status).toBe(200);
  expect(body.items.length).toBeGreaterThan(3);
  expect(body.items[0]).toMatchObject({ state: "asked", package: live.id, mayDecide: false });
  expect((await api.call("GET", `/lots/${lot.lot}/reinstatements`, { as: "operator" })).status).toBe(403);
  expect((await api.call("GET", "/lots/NO-LOT/reinstatements", { as: "auditor" })).status).toBe(404);
});

it("leads a lot's thread to the earlier release that is live again", async () => {
  const second = await arrangeSecondDerived(people);
  const first = await arrangeReleased(people, second);
  await arrangeReleased(people, second);
  const { body: asked } = await api.call("POST", `/lots/${second.lot}/reinstatements`, {
    as: "engineer",
    body: { package: first.id, reason: "The new one drifts", password: PASSWORD },
  });
  expect((await decide(asked.id)).status).toBe(200);
  const thread = await getLotThread(api.ctx("engineer"), second.lot);
  expect([thread.newestPackageId, thread.review.count]).toEqual([first.id, "live"]);
});
