import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { setEnv } from "@/lib/env";
import { openTestApi, type TestApi } from "../support/api";
import { listMailTo } from "../support/mail";
import { openMailServer, type TestMailServer } from "../support/mail-server";
import { PASSWORD, type PersonName } from "../support/people";
import { approveDerivation, deriveGolden, type ReadLot, uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, buildGolden } from "../support/scenario/packaged";

// biome-ignore lint/suspicious/noExplicitAny: replies are looked at member by member; the routes check them themselves.
type Reply = any;

let api: TestApi;
let people: ScenarioPeople;
let read: ReadLot;
let server: TestMailServer;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  read = await uploadGoldenRuns(people, await arrangeFamilyLot(people));
  server = await openMailServer();
});
afterAll(async () => {
  setEnv({ SMTP_URL: "" });
  await server.close();
});

const decide = (id: string, body: object, as: PersonName = "reviewer") =>
  api.call("POST", `/derivations/${id}/decisions`, { as, body: { password: PASSWORD, ...body } });
const proposed = async (): Promise<string> => (await deriveGolden(people, read)).derivation;
const own = async (as: PersonName): Promise<Reply[]> => (await api.call("GET", "/today", { as })).body.own;
const subjectsTo = async (name: PersonName) =>
  (await listMailTo(api.db, `${name}@marram.example`)).map(({ template }) => template);
const mailCount = async () => (await api.db.selectFrom("mail").select("id").execute()).length;

describe("who is told that coefficients wait", () => {
  it("every reviewer who had no hand in them, and nobody else", async () => {
    const before = await subjectsTo("reviewer2");
    const id = await proposed();
    expect((await subjectsTo("reviewer")).at(-1)).toBe("coefficients-proposed");
    expect(await subjectsTo("reviewer2")).toHaveLength(before.length + 1);
    expect(await subjectsTo("engineer")).toEqual([]);
    expect(await subjectsTo("auditor")).toEqual([]);
    const mail = (await listMailTo(api.db, "reviewer@marram.example")).at(-1);
    expect(mail?.body).toContain(`http://127.0.0.1:3000/derivations/${id}`);
    expect(mail?.body).toContain("28 devices of lot MW20-2609");
  });

  it("nobody where a finding of the whole lot blocks", async () => {
    const before = await mailCount();
    const started = await api.call("POST", `/lots/${read.lot}/derivations`, {
      as: "engineer",
      body: { method: "pooled-gain", order: 1, runs: [read.runs.verification] },
    });
    await api.runJobs();
    expect((await api.call("GET", `/derivations/${started.body.id}`, { as: "reviewer" })).body.state).toBe("proposed");
    expect(await mailCount()).toBe(before);
  });

  it("of an import too", async () => {
    const csv =
      "serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc\nMW20-2609-00001,-231.9,0.1246,-0.0139,6.9e-06,0.996,-0.00041\n";
    const reply = await api.call("POST", `/lots/${read.lot}/coefficients`, {
      as: "engineer",
      query: { referenceC: 20, capacityKg: 20 },
      headers: { "content-type": "text/csv" },
      body: csv,
    });
    expect(reply.status).toBe(201);
    expect((await listMailTo(api.db, "reviewer2@marram.example")).at(-1)?.body).toContain("1 device of lot");
  });
});

describe("a refusal", () => {
  it("reaches the engineer's Today page and, through a mail server, the engineer's mail", async () => {
    const id = await proposed();
    setEnv({ SMTP_URL: server.url });
    const reason = "The sensor was read before the soak was over";
    expect((await decide(id, { decision: "refuse", reason })).status).toBe(200);
    expect(await own("engineer")).toMatchObject([
      { kind: "derivation", detail: `refused: ${reason}`, who: "reviewer", tone: "bad", link: `/derivations/${id}` },
    ]);
    await api.runJobs();
    const mail = server.received.find((one) => one.subject === "Coefficients of MW20-2609 were refused");
    expect(mail?.text).toContain(reason);
    expect([mail?.to].flat()[0]?.text).toBe("engineer@marram.example");
    setEnv({ SMTP_URL: "" });
  });

  it("of some devices does so as well, while the others still wait", async () => {
    const id = await proposed();
    const body = { decision: "refuse", serials: ["MW20-2609-00003"], reason: "Board was warm" };
    expect((await decide(id, body)).body.state).toBe("proposed");
    expect(await own("engineer")).toMatchObject([{ detail: "refused: Board was warm", link: `/derivations/${id}` }]);
    expect((await listMailTo(api.db, "engineer@marram.example")).at(-1)?.body).toContain("1 device of lot");
  });

  it("that is itself refused tells nobody", async () => {
    const id = await proposed();
    const before = await mailCount();
    expect((await decide(id, { decision: "refuse", reason: "x", password: "not it" })).status).toBe(403);
    expect((await decide(id, { decision: "refuse" })).status).toBe(422);
    expect((await decide(id, { decision: "refuse", serials: ["NOBODY"], reason: "x" })).status).toBe(422);
    expect((await decide(id, { decision: "refuse", reason: "x" }, "engineer")).status).toBe(403);
    expect(await mailCount()).toBe(before);
  });
});

describe("a revocation", () => {
  it("names the packages that carry the coefficients, tells who made them, and stops what is not live yet", async () => {
    const id = await proposed();
    await approveDerivation(people, id);
    const live = await arrangeReleased(people, { ...read, derivation: id });
    const draft = await buildGolden(people, read, { step: "minor" });
    const reply = await api.call("GET", `/derivations/${id}/packages`, { as: "auditor" });
    expect(reply.body.items).toEqual([
      { id: draft.id, version: draft.version, state: "draft", devices: 28 },
      { id: live.id, version: live.version, state: "live", devices: 28 },
    ]);
    const revoked = await decide(id, { decision: "revoke", serials: ["MW20-2609-00002"], reason: "Certificate wrong" });
    expect(revoked.body).toMatchObject({ state: "partly-approved", counts: { states: { approved: 27, revoked: 1 } } });
    expect((await own("engineer")).map((one) => one.detail)).toContain("approval taken back: Certificate wrong");
    expect((await listMailTo(api.db, "engineer@marram.example")).at(-1)).toMatchObject({
      template: "coefficients-revoked",
      body: expect.stringContaining("Certificate wrong"),
    });
    expect((await api.call("GET", `/packages/${live.id}`, { as: "auditor" })).body.state).toBe("live");
  });

  it("asks for a lot that is there, and for somebody who may look", async () => {
    const nowhere = "/derivations/0192f3a0-0000-7000-8000-000000000000/packages";
    expect((await api.call("GET", nowhere, { as: "auditor" })).status).toBe(404);
    expect((await api.call("GET", nowhere, { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", nowhere)).status).toBe(401);
  });
});
