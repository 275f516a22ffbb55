import { createHash } from "node:crypto";
import { beforeAll, describe, expect, it } from "vitest";
import { readZip } from "@/builders/bundle/read-zip";
import { buildPackage } from "@/lib/services/packages/build-package";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { systemContext } from "../support/jobs";
import { PASSWORD } from "../support/people";
import { arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import { publishLayout, type ScenarioPeople } from "../support/scenario/family-lot";
import { buildGolden } from "../support/scenario/packaged";

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

const ask = (lot: string, body: object, as: "engineer" | "engineer2" = "engineer") =>
  api.call("POST", `/lots/${lot}/packages`, { as, body });
const get = async (id: string) => (await api.call("GET", `/packages/${id}`, { as: "engineer" })).body;
const countPackages = async () => (await api.db.selectFrom("package").select("id").execute()).length;
const hold = (serial: string, held: boolean) =>
  api.db.updateTable("device").set({ held }).where("serial", "=", serial).execute();
const sha256 = (bytes: Buffer | undefined) =>
  createHash("sha256")
    .update(bytes ?? "")
    .digest("hex");

/** Devices of the examples that come with their HEX file. */
const HEX_FILES = {
  first: ["MW20-2609-00001", "MW20-2609-00002", "MW20-2609-00011", "MW20-2609-00024"],
  second: ["MW300-2610-00001", "MW300-2610-00013"],
};

const verdictsOf = (body: { checks: { code: string; verdict: string }[] }) =>
  Object.fromEntries(body.checks.map((check) => [check.code, check.verdict]));

describe("building a golden lot", () => {
  it.each([
    { name: "first", images: 28, coverage: "pass" },
    { name: "second", images: 14, coverage: "warn" },
  ] as const)("gives all images of the $name example their SHA-256", async ({ name, images, coverage }) => {
    const lot = name === "first" ? first : second;
    const started = await ask(lot.lot, { layout: lot.layoutVersion, notes: "First of its lot" });
    expect(started).toMatchObject({ status: 202, body: { version: "1.0.0", state: "building" } });
    expect(await get(started.body.id)).toMatchObject({
      state: "building",
      digest: null,
      reviewDigest: null,
      checks: [],
      progress: { done: 0, total: images },
    });
    await api.runJobs();
    const body = await get(started.body.id);
    expect(body).toMatchObject({
      state: "draft",
      failure: null,
      notes: "First of its lot",
      lot: lot.lot,
      counts: { devices: images, lotDevices: lot.serials.length },
      derivations: [lot.derivation],
      reviewers: ["reviewer", "reviewer2"],
      mayDecide: false,
      isMaker: true,
    });
    const rows = await api.db
      .selectFrom("image")
      .select(["serial", "sha256", "hexSha256"])
      .where("packageId", "=", body.id)
      .execute();
    expect(rows).toHaveLength(images);
    const digests = Object.fromEntries(rows.map((row) => [row.serial, row.sha256.toString("hex")]));
    expect(digests).toEqual(JSON.parse(lot.read("images/sha256-of-bytes.json").toString()));
    for (const serial of HEX_FILES[name]) {
      const row = rows.find((one) => one.serial === serial);
      expect(row?.hexSha256.toString("hex")).toBe(sha256(lot.read(`images/${serial}.hex`)));
    }
    expect(verdictsOf(body)).toEqual({
      coverage,
      "decided-sets": "pass",
      firmware: "pass",
      limits: "pass",
      "round-trip": "pass",
      "reserved-bytes": "pass",
      "hex-reading": "pass",
      repeatability: "pass",
      outliers: "pass",
      "equal-images": "pass",
      pooling: "pass",
      verification: "pass",
      "proven-range": "pass",
      twin: "pass",
      "live-difference": "pass",
    });
  });

  it("keeps manifest, values and sums whose digests hold", async () => {
    const { id } = await buildGolden(people, first);
    const body = await get(id);
    const files = await api.db.selectFrom("packageFile").selectAll().where("packageId", "=", id).execute();
    const bundle = readZip((await api.call("GET", `/packages/${id}/bundle`, { as: "engineer" })).body);
    const content = Object.fromEntries(files.map(({ name }) => [name, Buffer.from(bundle.get(name) ?? "")]));
    const sha256 = (bytes: Buffer | undefined) =>
      createHash("sha256")
        .update(bytes ?? "")
        .digest("hex");
    for (const file of files) expect(file.content ?? content[file.name]).toEqual(content[file.name]);
    for (const file of files) expect(sha256(content[file.name])).toBe(file.sha256.toString("hex"));
    expect(body.digest).toBe(sha256(content["manifest.json"]));
    const manifest = JSON.parse(String(content["manifest.json"]));
    expect(manifest).toMatchObject({
      format: "trimwright/package@1",
      lot: first.lot,
      version: body.version,
      firmware: "2.3.0",
      provenRange: [8.06, 41.9],
      values: { path: "images.jsonl", sha256: sha256(content["images.jsonl"]) },
    });
    expect(manifest.derivations[0].runs).toHaveLength(4);
    expect(String(content["images.jsonl"]).trim().split("\n")).toHaveLength(28);
    expect(String(content.SHA256SUMS)).toContain(`${body.digest}  manifest.json\n`);
    const numbers = JSON.parse(String(content["images.jsonl"]).split("\n")[0] ?? "");
    expect(Object.keys(numbers)).toEqual(["derivation", "fields", "serial", "sha256"]);
  });

  it("names everybody who had a hand in it", async () => {
    const { id } = await buildGolden(people, first, { by: api.ctx("engineer2") });
    const { makers } = await get(id);
    const acts = makers.map((one: { name: string; act: string }) => `${one.name} ${one.act}`).sort();
    expect(acts).toEqual(["engineer derived", "engineer uploaded", "engineer2 built"]);
    const exclusion = await buildGolden(people, second);
    expect((await get(exclusion.id)).makers).toContainEqual(expect.objectContaining({ act: "excluded" }));
  });
});

describe("the job", () => {
  it("does nothing where the package has ended", async () => {
    const { id } = await buildGolden(people, first);
    const before = await get(id);
    await buildPackage(systemContext(api.db), { packageId: id });
    expect(await get(id)).toEqual(before);
    const events = await api.db
      .selectFrom("ledgerEvent")
      .select("action")
      .where("subject", "=", id)
      .orderBy("seq")
      .execute();
    expect(events.map((event) => event.action)).toEqual(["package.build-started", "package.built"]);
  });

  it("run twice at once stores the package once", async () => {
    const { body } = await ask(first.lot, { layout: "1.0.0" });
    await Promise.all([1, 2].map(() => buildPackage(systemContext(api.db), { packageId: body.id })));
    expect((await get(body.id)).state).toBe("draft");
    const images = await api.db.selectFrom("image").select("serial").where("packageId", "=", body.id).execute();
    expect(images).toHaveLength(28);
    await api.runJobs();
  });

  it("ends as failed where other devices are to be packed than it was numbered for", async () => {
    const { body } = await ask(first.lot, { layout: "1.0.0" });
    await hold("MW20-2609-00007", true);
    await api.runJobs();
    await hold("MW20-2609-00007", false);
    expect(await get(body.id)).toMatchObject({ state: "failed", failure: { code: "package.devices_changed" } });
  });

  it("gives the same manifest for the same inputs, but for the version", async () => {
    const [a, b] = [await buildGolden(people, first), await buildGolden(people, first)];
    const manifestOf = async (id: string) => {
      const file = await api.db
        .selectFrom("packageFile")
        .select("content")
        .where("packageId", "=", id)
        .where("name", "=", "manifest.json")
        .executeTakeFirstOrThrow();
      return JSON.parse(String(file.content));
    };
    const { version: _a, images: _ia, values: _va, ...restA } = await manifestOf(a.id);
    const { version: _b, images: _ib, values: _vb, ...restB } = await manifestOf(b.id);
    expect(restA).toEqual(restB);
  });
});

describe("refusals", () => {
  it("asks for a sign-in, the role, a lot and a layout", async () => {
    const before = await countPackages();
    const body = { layout: "1.0.0" };
    const path = `/lots/${first.lot}/packages`;
    expect((await api.call("POST", path, { body })).status).toBe(401);
    for (const as of ["reviewer", "operator", "service", "auditor", "admin"] as const) {
      expect(await api.call("POST", path, { as, body })).toMatchObject({
        status: 403,
        body: { code: "auth.forbidden" },
      });
    }
    expect(await ask("NO-LOT", body)).toMatchObject({ status: 404, body: { code: "lot.not_found" } });
    expect(await ask(first.lot, { layout: "9.9.9" })).toMatchObject({
      status: 404,
      body: { code: "layout.not_found" },
    });
    expect(await ask(first.lot, { layout: "one" })).toMatchObject({ status: 422, body: { code: "request.invalid" } });
    expect(await ask(first.lot, { layout: "1.0.0", step: "huge" })).toMatchObject({ status: 422 });
    expect(await ask(first.lot, { layout: "1.0.0", surprise: 1 })).toMatchObject({ status: 422 });
    expect(await countPackages()).toBe(before);
  });

  it("takes no layout that is not published, or for other firmware", async () => {
    const draft = { ...JSON.parse(first.layout), version: "1.0.1" };
    await api.call("POST", `/families/MW-20/layouts`, { as: "engineer", body: draft });
    expect(await ask(first.lot, { layout: "1.0.1" })).toMatchObject({
      status: 409,
      body: { code: "layout.not_published", state: "draft" },
    });
    await publishLayout(people, JSON.stringify({ ...draft, version: "3.0.0", firmware: ">=3.0.0 <4.0.0" }));
    expect(await ask(first.lot, { layout: "3.0.0" })).toMatchObject({
      status: 409,
      body: { code: "layout.firmware_mismatch", firmware: "2.3.0" },
    });
  });

  it("needs approved coefficients", async () => {
    await api.call("POST", "/lots", {
      as: "engineer",
      body: { code: "MW20-EMPTY", family: "MW-20", firmware: "2.3.0" },
    });
    await api.call("POST", "/lots/MW20-EMPTY/devices", { as: "engineer", body: { serials: ["E-1"] } });
    expect(await ask("MW20-EMPTY", { layout: "1.0.0" })).toMatchObject({
      status: 409,
      body: { code: "package.nothing_approved", leftOut: { "no-coefficients": 1 } },
    });
  });

  it("reads packages as every reader, by key too, and refuses operators and stations", async () => {
    const { id } = await buildGolden(people, first);
    expect((await api.call("GET", `/packages/${id}`)).status).toBe(401);
    expect((await api.call("GET", `/packages/${id}`, { as: "operator" })).status).toBe(403);
    const bearer = await insertAccessKey(api.owner, api.people.auditor.id);
    expect((await api.call("GET", `/packages/${id}`, { as: { bearer } })).status).toBe(200);
    expect(await api.call("GET", "/packages/0190b0f0-0000-7000-8000-000000000000", { as: "auditor" })).toMatchObject({
      status: 404,
      body: { code: "package.not_found" },
    });
    expect((await api.call("GET", "/packages/none", { as: "auditor" })).status).toBe(422);
  });

  it("answers a repeated request with the same package", async () => {
    const before = await countPackages();
    const headers = { "idempotency-key": "build-once" };
    const body = { layout: "1.0.0" };
    const path = `/lots/${first.lot}/packages`;
    const a = await api.call("POST", path, { as: "engineer", body, headers });
    const b = await api.call("POST", path, { as: "engineer", body, headers });
    expect(b).toMatchObject({ status: 202, body: { id: a.body.id } });
    expect(await countPackages()).toBe(before + 1);
    await api.runJobs();
  });
});

it("lists a lot's packages by pages, newest first, with their verdicts", async () => {
  const all = (await api.call("GET", `/lots/${first.lot}/packages`, { as: "auditor" })).body;
  expect(all.next).toBeNull();
  const pages: string[] = [];
  let cursor: string | null = null;
  do {
    const query: Record<string, string | number> = { limit: 3, ...(cursor && { cursor }) };
    const { body } = await api.call("GET", `/lots/${first.lot}/packages`, { as: "auditor", query });
    pages.push(...body.items.map((item: { id: string }) => item.id));
    cursor = body.next;
  } while (cursor);
  expect(pages).toEqual(all.items.map((item: { id: string }) => item.id));
  expect(all.items.at(-1)).toMatchObject({ version: "1.0.0", state: "draft", checks: { pass: 15, warn: 0, fail: 0 } });
  expect((await api.call("GET", "/lots/NO-LOT/packages", { as: "auditor" })).status).toBe(404);
});
