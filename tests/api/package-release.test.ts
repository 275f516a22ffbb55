import { verify } from "node:crypto";
import { beforeAll, describe, expect, it } from "vitest";
import { keyIdOf } from "@/builders/bundle/release";
import { canonicalJson } from "@/lib/domain/canonical-json";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { approveDerivation, arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { approveSubmitted, arrangeApproved, arrangeReleased, submitBuilt } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let first: DerivedLot;
let second: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  first = await arrangeDerived(people);
  second = await arrangeSecondDerived(people);
});

const post = (id: string, what: "release" | "withdraw" | "take-back", as: PersonName, body?: object) =>
  api.call("POST", `/packages/${id}/${what}`, { as, ...(body && { body }) });
const release = (id: string, as: PersonName = "engineer", change: object = {}) =>
  post(id, "release", as, { password: PASSWORD, ...change });
const withdraw = (id: string, as: PersonName = "engineer", change: object = {}) =>
  post(id, "withdraw", as, { password: PASSWORD, reason: "Wrong load cell type", ...change });
const get = async (id: string) => (await api.call("GET", `/packages/${id}`, { as: "auditor" })).body;
const sequenceOf = async (lot: string) => (await api.call("GET", `/lots/${lot}`, { as: "auditor" })).body.sequence;
const periodsOf = (packageId: string) =>
  api.db.selectFrom("livePeriod").selectAll().where("packageId", "=", packageId).orderBy("sequence").execute();

describe("release", () => {
  it("makes an approved package live, with a signed record", async () => {
    const approved = await arrangeApproved(people, second);
    const reply = await release(approved.id, "engineer", { reason: "First of the lot" });
    expect(reply).toMatchObject({ status: 200, body: { state: "live", sequence: 1 } });
    expect(reply.body.liveSince).not.toBeNull();
    expect(await sequenceOf(second.lot)).toBe(1);
    const [period] = await periodsOf(approved.id);
    const bytes = period?.releaseDocument as Buffer;
    const record = JSON.parse(bytes.toString("utf8"));
    expect(bytes.toString("utf8")).toBe(canonicalJson(record));
    const key = await api.db.selectFrom("signingKey").selectAll().executeTakeFirstOrThrow();
    expect(keyIdOf(key.publicPem)).toBe(record.keyId);
    expect(verify(null, bytes, key.publicPem, period?.signature as Buffer)).toBe(true);
    const sums = await api.db
      .selectFrom("packageFile")
      .select("sha256")
      .where("packageId", "=", approved.id)
      .where("name", "=", "SHA256SUMS")
      .executeTakeFirstOrThrow();
    expect(record).toMatchObject({
      format: "trimwright/release@1",
      lot: second.lot,
      version: approved.version,
      package: reply.body.digest,
      sums: sums.sha256.toString("hex"),
      reviewDigest: reply.body.reviewDigest,
      sequence: 1,
      kind: "release",
      reason: "First of the lot",
      approvals: [{ name: "reviewer", role: "reviewer", meaning: expect.stringContaining("approve") }],
      coefficientApprovals: [{ derivation: second.derivation, name: "reviewer", role: "reviewer", devices: null }],
      waivers: [{ check: "coverage", name: "reviewer", reason: "Looked at, of no weight here" }],
      exclusions: [{ derivation: second.derivation, serial: "MW300-2610-00003", name: "engineer" }],
      equipment: [],
      keyId: key.id,
    });
    expect(Object.keys(record).sort()).toEqual(Object.keys(record));
    expect(record.acknowledgements).toContainEqual(
      expect.objectContaining({ finding: "gain.not_trimmed", serial: "MW300-2610-00012" }),
    );
    const { rows } = await ledgerAround(approved.id);
    expect(rows.released.previous.toString("hex")).toBe(record.ledgerHead);
    expect(rows.data).toMatchObject({ sequence: 1, superseded: null, keyId: key.id });
  });

  async function ledgerAround(id: string) {
    const released = await api.db
      .selectFrom("ledgerEvent")
      .selectAll()
      .where("subject", "=", id)
      .where("action", "=", "package.released")
      .executeTakeFirstOrThrow();
    return { rows: { released, data: JSON.parse(released.canonical).data } };
  }

  it("names the equipment behind the readings; the manifest names the board that was measured", async () => {
    const chamber = {
      code: "CH-1",
      kind: "chamber",
      certificate: "C-77",
      calibratedUntil: "2031-01-01",
      uncertainty: 0.2,
    };
    expect((await api.call("POST", "/equipment", { as: "engineer", body: chamber })).status).toBe(201);
    await api.call("POST", "/lots", { as: "engineer", body: { code: "BOARDS", family: "MW-20", firmware: "2.3.0" } });
    const [header, ...rows] = first
      .read("readings-sample.csv")
      .toString()
      .trim()
      .replaceAll("2609", "26HW")
      .split("\n");
    const csv = [`${header},hardware_id`, ...rows.map((row) => `${row},B-${row.split(",")[0]}`)].join("\n");
    const run = await api.call("POST", "/lots/BOARDS/runs", {
      as: "engineer",
      body: csv,
      headers: { "content-type": "text/csv" },
      query: { purpose: "sample", equipment: "CH-1", addDevices: true },
    });
    expect(run.status).toBe(201);
    const options = { method: "individual", order: 1, runs: [run.body.id] };
    const derivation = await api.call("POST", "/lots/BOARDS/derivations", { as: "engineer", body: options });
    await api.runJobs();
    await approveDerivation(people, derivation.body.id);
    // A board was changed after the measurement: the device is packed, and the check says so.
    await api.db.updateTable("device").set({ hardwareId: "OTHER" }).where("serial", "=", "MW20-26HW-00002").execute();
    const released = await arrangeReleased(people, { ...first, lot: "BOARDS", derivation: derivation.body.id });
    const manifest = await api.db
      .selectFrom("packageFile")
      .select("content")
      .where("packageId", "=", released.id)
      .where("name", "=", "manifest.json")
      .executeTakeFirstOrThrow();
    const { images, provenRange } = JSON.parse(String(manifest.content));
    expect(images).toHaveLength(10);
    for (const image of images) expect(image.hardwareId).toBe(`B-${image.serial}`);
    expect(provenRange).not.toBeNull();
    const { checks } = await get(released.id);
    expect(checks[0]).toMatchObject({
      code: "coverage",
      verdict: "warn",
      evidence: { otherBoard: { serials: ["MW20-26HW-00002"] } },
    });
    const [period] = await periodsOf(released.id);
    const { code, ...facts } = chamber;
    expect(JSON.parse(String(period?.releaseDocument)).equipment).toEqual([{ run: run.body.id, code, ...facts }]);
  });

  it("supersedes what was live and raises the lot's sequence", async () => {
    const one = await arrangeReleased(people, first);
    const two = await arrangeReleased(people, first);
    expect(await get(one.id)).toMatchObject({ state: "superseded", liveSince: null });
    expect(await get(two.id)).toMatchObject({ state: "live", sequence: 2 });
    expect(await sequenceOf(first.lot)).toBe(2);
  });

  it("is for signed-in engineers and reviewers with the password, of an approved package", async () => {
    const approved = await arrangeApproved(people, first);
    const before = await sequenceOf(first.lot);
    expect((await api.call("POST", `/packages/${approved.id}/release`, { body: { password: PASSWORD } })).status).toBe(
      401,
    );
    for (const as of ["operator", "service", "auditor", "admin"] as const) {
      expect(await release(approved.id, as)).toMatchObject({ status: 403, body: { code: "auth.forbidden" } });
    }
    expect(await release(approved.id, "reviewer", { password: "wrong" })).toMatchObject({
      status: 403,
      body: { code: "auth.password_wrong" },
    });
    expect((await release(approved.id, "reviewer", { password: undefined })).status).toBe(422);
    const bearer = await insertAccessKey(api.owner, api.people.engineer.id);
    const byKey = await api.call("POST", `/packages/${approved.id}/release`, {
      as: { bearer },
      body: { password: PASSWORD },
    });
    expect(byKey).toMatchObject({ status: 403, body: { code: "auth.session_required" } });
    expect((await release("0190b0f0-0000-7000-8000-000000000000")).status).toBe(404);
    expect(await sequenceOf(first.lot)).toBe(before);
    expect(await release(approved.id, "reviewer2")).toMatchObject({ status: 200, body: { state: "live" } });
    expect(await release(approved.id, "reviewer2")).toMatchObject({
      status: 409,
      body: { code: "package.wrong_state", state: "live" },
    });
  });

  it("happens once where two release at the same moment", async () => {
    const approved = await arrangeApproved(people, first);
    const before = await sequenceOf(first.lot);
    const replies = await Promise.all([release(approved.id, "engineer"), release(approved.id, "reviewer")]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 409]);
    expect(await sequenceOf(first.lot)).toBe(before + 1);
    expect(await periodsOf(approved.id)).toHaveLength(1);
  });

  it("lets one of two approved packages live; the other was compared with something else and is taken back", async () => {
    const [one, two] = [await arrangeApproved(people, first), await arrangeApproved(people, first)];
    const replies = await Promise.all([release(one.id), release(two.id, "reviewer")]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 409]);
    const [winner, loser] = replies[0]?.status === 200 ? [one, two] : [two, one];
    expect(replies.find((reply) => reply.status === 409)?.body.code).toBe("package.live_changed");
    const live = await api.db.selectFrom("package").select("id").where("state", "=", "live").execute();
    expect(live.map((row) => row.id)).toContain(winner.id);
    expect(await post(loser.id, "take-back", "engineer2")).toMatchObject({ status: 200, body: { state: "draft" } });
    await submitBuilt(people, loser);
    await approveSubmitted(people, loser);
    expect(await release(loser.id)).toMatchObject({ status: 200, body: { state: "live" } });
  });

  it("refuses where the live package was withdrawn since the approval", async () => {
    const live = await arrangeReleased(people, first);
    const approved = await arrangeApproved(people, first);
    await withdraw(live.id);
    expect(await release(approved.id)).toMatchObject({
      status: 409,
      body: { code: "package.live_changed", live: null },
    });
    expect((await get(approved.id)).state).toBe("approved");
  });

  it("refuses coefficients that were revoked since the approval", async () => {
    const approved = await arrangeApproved(people, second);
    await api.call("POST", `/derivations/${second.derivation}/decisions`, {
      as: "reviewer",
      body: { decision: "revoke", serials: ["MW300-2610-00015"], reason: "Wrong load", password: PASSWORD },
    });
    expect(await release(approved.id)).toMatchObject({
      status: 409,
      body: { code: "package.sets_lapsed", serials: ["MW300-2610-00015"] },
    });
  });
});

describe("withdrawal", () => {
  it("stops the live package by one person at once, and counts as a change of what is live", async () => {
    const live = await arrangeReleased(people, first);
    const before = await sequenceOf(first.lot);
    expect(await withdraw(live.id)).toMatchObject({ status: 200, body: { state: "withdrawn", sequence: before + 1 } });
    expect(await sequenceOf(first.lot)).toBe(before + 1);
    const [, withdrawal] = await periodsOf(live.id);
    expect(withdrawal).toMatchObject({ kind: "withdrawal", reason: "Wrong load cell type", releaseDocument: null });
    expect(await withdraw(live.id)).toMatchObject({ status: 409, body: { code: "package.wrong_state" } });
  });

  it("is for signed-in engineers and reviewers with the password, of a live package", async () => {
    const approved = await arrangeApproved(people, first);
    expect(await withdraw(approved.id)).toMatchObject({ status: 409, body: { code: "package.wrong_state" } });
    await release(approved.id);
    expect((await api.call("POST", `/packages/${approved.id}/withdraw`, { body: { password: PASSWORD } })).status).toBe(
      401,
    );
    expect((await withdraw(approved.id, "auditor")).status).toBe(403);
    expect(await withdraw(approved.id, "reviewer", { password: "wrong" })).toMatchObject({ status: 403 });
    expect((await withdraw("0190b0f0-0000-7000-8000-000000000000")).status).toBe(404);
    expect((await get(approved.id)).state).toBe("live");
    expect(await withdraw(approved.id, "reviewer")).toMatchObject({ status: 200, body: { state: "withdrawn" } });
  });
});
