import { beforeAll, describe, expect, it } from "vitest";
import { drawSample } from "@/lib/domain/compensation/draw-sample";
import { poolingLimit } from "@/lib/domain/compensation/envelope";
import { planSample } from "@/lib/domain/compensation/sample-plan";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import type { GoldenLot } from "../support/scenario/golden";

let api: TestApi;
let people: ScenarioPeople;
let golden: GoldenLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  golden = await arrangeFamilyLot(people);
});

const SEED = "00112233445566778899aabbccddeeff";
const draw = (lot: string, body: object, as: PersonName = "engineer") =>
  api.call("POST", `/lots/${lot}/sample-draws`, { as, body });
const add = (lot: string, body: object, as: PersonName = "engineer") =>
  api.call("POST", `/lots/${lot}/devices`, { as, body });
const eventsOf = (subject: string, action: string) =>
  api.db
    .selectFrom("ledgerEvent")
    .select("canonical")
    .where("subject", "=", subject)
    .where("action", "=", action)
    .execute();
const countDraws = async () => (await api.db.selectFrom("sampleDraw").select("id").execute()).length;
const deviceOf = async (lot: string, serial: string) =>
  (await api.call("GET", `/lots/${lot}/devices`, { as: "auditor", query: { q: serial } })).body.items[0];

async function newLot(code: string, devices: object[]): Promise<void> {
  await api.call("POST", "/lots", { as: "engineer", body: { code, family: "MW-20", firmware: "2.3.0" } });
  await add(code, { devices });
}

describe("batches of devices", () => {
  it("come with the serials, known ones too, and are listed", async () => {
    await newLot("BATCH", [{ serial: "b-1", gaugeBatch: " g-7 ", materialBatch: "M-1" }, { serial: "B-2" }]);
    expect(await deviceOf("BATCH", "B-1")).toMatchObject({ gaugeBatch: "G-7", materialBatch: "M-1" });
    expect(await deviceOf("BATCH", "B-2")).toMatchObject({ gaugeBatch: null, materialBatch: null });
    const reply = await add("BATCH", { serials: ["B-3"], devices: [{ serial: "B-2", gaugeBatch: "G-8" }] });
    expect([reply.status, reply.body]).toEqual([200, { added: 1, known: 1, batchesSet: 1 }]);
    expect(await deviceOf("BATCH", "B-2")).toMatchObject({ gaugeBatch: "G-8", materialBatch: null });
    expect(await eventsOf("BATCH", "devices.batches-set")).toHaveLength(1);
  });

  it("are not lost by naming the serial again without them", async () => {
    expect((await add("BATCH", { devices: [{ serial: "B-1" }] })).body).toEqual({ added: 0, known: 1, batchesSet: 0 });
    expect(await deviceOf("BATCH", "B-1")).toMatchObject({ gaugeBatch: "G-7", materialBatch: "M-1" });
  });

  it("change only with a reason, which the ledger keeps", async () => {
    const devices = [{ serial: "B-1", gaugeBatch: "G-9" }, { serial: "B-9" }];
    const refused = await add("BATCH", { devices });
    expect([refused.status, refused.body.code, refused.body.serials]).toEqual([409, "device.batch_differs", ["B-1"]]);
    expect(await deviceOf("BATCH", "B-9")).toBeUndefined();
    expect(await deviceOf("BATCH", "B-1")).toMatchObject({ gaugeBatch: "G-7" });
    const done = await add("BATCH", { devices, reason: "misread on the traveller" });
    expect([done.status, done.body]).toEqual([200, { added: 1, known: 1, batchesSet: 1 }]);
    expect(await deviceOf("BATCH", "B-1")).toMatchObject({ gaugeBatch: "G-9", materialBatch: "M-1" });
    const corrections = await api.db.selectFrom("deviceBatchCorrection").select(["gaugeBatch", "reason"]).execute();
    expect(corrections).toEqual([{ gaugeBatch: "G-9", reason: "misread on the traveller" }]);
  });

  it("can't be given twice in different ways, nor in another form than codes", async () => {
    const twice = await add("BATCH", {
      devices: [
        { serial: "B-4", gaugeBatch: "G-1" },
        { serial: "b-4", gaugeBatch: "G-2" },
      ],
    });
    expect([twice.status, twice.body.code]).toEqual([422, "device.batches_contradict"]);
    const form = await add("BATCH", { devices: [{ serial: "B-4", gaugeBatch: "=1+1" }] });
    expect([form.status, form.body.errors[0].path]).toEqual([422, "/devices/0/gaugeBatch"]);
    expect((await add("BATCH", {})).status).toBe(422);
    expect(await deviceOf("BATCH", "B-4")).toBeUndefined();
  });

  it("of a device of another lot are refused with it", async () => {
    const reply = await add("BATCH", { devices: [{ serial: golden.serials[0], gaugeBatch: "G-1" }] });
    expect([reply.status, reply.body.code]).toEqual([409, "device.in_other_lot"]);
  });
});

describe("drawing a sample", () => {
  it("records seed, strata and what was left out, and repeats itself", async () => {
    const devices = Array.from({ length: 40 }, (_, i) => ({
      serial: `D-${String(i + 1).padStart(2, "0")}`,
      gaugeBatch: i < 20 ? "G-1" : "G-2",
      materialBatch: i % 2 === 0 ? "M-1" : "M-2",
    }));
    await newLot("DRAW", devices);
    await api.call("POST", "/devices/D-05/events", {
      as: "engineer",
      body: { kind: "hold", reason: "fell", password: PASSWORD },
    });
    await api.call("POST", "/devices/D-06/events", { as: "engineer", body: { kind: "scrap", reason: "fell twice" } });
    const { status, body } = await draw("DRAW", { count: 8, seed: SEED.toUpperCase() });
    expect(status, JSON.stringify(body)).toBe(201);
    expect(body).toMatchObject({ lot: "DRAW", seed: SEED, count: 8, eligible: 38, createdBy: "engineer" });
    expect(body.leftOut).toEqual([
      { reason: "held", count: 1, serials: ["D-05"] },
      { reason: "scrapped", count: 1, serials: ["D-06"] },
    ]);
    expect(body.strata).toHaveLength(4);
    for (const stratum of body.strata) expect(stratum.drawn).toBe(2);
    const eligible = devices.filter(({ serial }) => !["D-05", "D-06"].includes(serial));
    expect(body.serials).toEqual(drawSample({ devices: eligible, count: 8, seed: SEED }).serials);
    expect((await draw("DRAW", { count: 8, seed: SEED })).body.serials).toEqual(body.serials);
    const [event] = await eventsOf("DRAW", "sample.drawn");
    expect(JSON.parse(String(event?.canonical)).data).toMatchObject({
      draw: body.id,
      seed: SEED,
      serials: body.serials,
    });
  });

  it("takes a seed of its own where none is given, another each time", async () => {
    const seeds = [(await draw("DRAW", { count: 5 })).body.seed, (await draw("DRAW", { count: 5 })).body.seed];
    for (const seed of seeds) expect(seed).toMatch(/^[0-9a-f]{32}$/);
    expect(seeds[0]).not.toBe(seeds[1]);
  });

  it("is listed, newest first, in pages", async () => {
    const first = await api.call("GET", "/lots/draw/sample-draws", { as: "auditor", query: { limit: 3 } });
    expect(first.body.items.map((one: { count: number }) => one.count)).toEqual([5, 5, 8]);
    const query = { limit: 3, cursor: first.body.next };
    const rest = await api.call("GET", "/lots/DRAW/sample-draws", { as: "auditor", query });
    expect([rest.body.items.length, rest.body.next]).toEqual([1, null]);
    expect((await api.call("GET", "/lots/DRAW/sample-draws", { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", "/lots/NONE/sample-draws", { as: "auditor" })).status).toBe(404);
  });

  it("leaves out what was measured before, so that it can draw for verification", async () => {
    await uploadGoldenRuns(people, golden);
    const { body } = await draw(golden.lot, { count: 5 });
    const measured = body.leftOut.find((one: { reason: string }) => one.reason === "measured");
    expect(measured.count + body.eligible).toBe(golden.serials.length);
    expect(measured.count).toBeGreaterThanOrEqual(10);
    for (const serial of body.serials) expect(measured.serials).not.toContain(serial);
  });

  it.each([
    [422, "draw.too_few", { count: 39 }],
    [422, "request.invalid", { count: 0 }],
    [422, "request.invalid", { count: 1.5 }],
    [422, "request.invalid", { count: 5, seed: "abc" }],
  ])("answers %i %s", async (status, code, body) => {
    const before = await countDraws();
    const reply = await draw("DRAW", body);
    expect([reply.status, reply.body.code, await countDraws()]).toEqual([status, code, before]);
  });

  it("is an engineer's", async () => {
    const before = await countDraws();
    expect((await api.call("POST", "/lots/DRAW/sample-draws", { body: { count: 5 } })).status).toBe(401);
    expect((await draw("DRAW", { count: 5 }, "reviewer")).body.code).toBe("auth.forbidden");
    expect((await draw("NONE", { count: 5 })).status).toBe(404);
    expect(await countDraws()).toBe(before);
  });
});

describe("GET /lots/{code}/sample-plan", () => {
  const ask = (query: Record<string, string | number>, lot = golden.lot) =>
    api.call("GET", `/lots/${lot}/sample-plan`, { as: "auditor", query });

  it("asks the pure planner with the family's limit and confidence", async () => {
    const { status, body } = await ask({ expectedSd: 1e-6 });
    expect(status, JSON.stringify(body)).toBe(200);
    const limit = poolingLimit(golden.family);
    const { coverage, confidence } = golden.family;
    expect(body).toMatchObject({ lot: golden.lot, limit, coverage, confidence, expectedSd: 1e-6, earlier: null });
    expect(body.sample).toEqual(planSample({ sd: 1e-6, limit, coverage, confidence }));
    // 0.05^(1/5); ln 0.05 / ln 0.9 = 28.4: both from the definition, k of k passing.
    expect(body.verification.shownByFive).toBeCloseTo(0.549, 3);
    expect(body.verification).toMatchObject({ share: 0.9, n: 29 });
  });

  it("says nothing on the sample where nothing is known of the scatter, and never fewer than five", async () => {
    expect((await ask({})).body).toMatchObject({ expectedSd: null, sample: null });
    expect((await ask({ expectedSd: 0 })).body.sample.n).toBe(5);
    expect((await ask({ expectedSd: 1 })).body.sample).toMatchObject({ outcome: "spread-too-large", n: null });
  });

  it("takes the scatter of the family's other lots, and says which", async () => {
    const reply = await api.call("POST", `/lots/${golden.lot}/derivations`, {
      as: "engineer",
      body: {
        method: "pooled-gain",
        order: 1,
        exclude: [],
        runs: (await api.call("GET", `/lots/${golden.lot}/runs`, { as: "auditor" })).body.items.map(
          (run: { id: string }) => run.id,
        ),
      },
    });
    await api.runJobs();
    const derived = (await api.call("GET", `/derivations/${reply.body.id}`, { as: "auditor" })).body;
    const { body } = await ask({}, "DRAW");
    const { sd, n } = derived.pooled;
    expect(body.earlier).toEqual({ sd, freedom: n - 1, lots: [{ lot: golden.lot, derivation: derived.id, sd, n }] });
    expect(body.expectedSd).toBe(sd);
    expect(body.sample.n).toBeGreaterThanOrEqual(5);
    expect((await ask({})).body.earlier).toBeNull();
  });

  it.each<Record<string, string | number>>([
    { expectedSd: "x" },
    { expectedSd: -1 },
    { coverage: 1 },
    { verificationShare: 0 },
  ])("refuses %j", async (query) => {
    expect((await ask(query)).status).toBe(422);
  });
});
