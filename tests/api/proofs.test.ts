import { v7 as uuidv7 } from "uuid";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { firstGolden } from "../support/scenario/golden";
import { arrangeReleased, buildGolden } from "../support/scenario/packaged";
import { arrangeStation, reportOf, sendWrites, type TestStation } from "../support/scenario/station";

const golden = firstGolden();
const LOT = golden.lot;
const serial = (n: number) => `${LOT}-${String(n).padStart(5, "0")}`;
const CSV = { "content-type": "text/csv" };
const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at,output_mv_v";

/** Coefficients of the independent program that comes with the example. */
const expected = JSON.parse(golden.read("expected-coefficients.json").toString("utf8"));

let api: TestApi;
let people: ScenarioPeople;
let station: TestStation;
let live: string;
let derived: DerivedLot;
let sampleRun: string;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
  sampleRun = derived.runs.sample;
  live = (await arrangeReleased(people, derived)).id;
  station = await arrangeStation(api, "Line 1");
}, 60_000);
afterAll(() => api.close());

/** The example's readings of a sample device, with the output that a device computing with the example's coefficients gives. */
function proofRows(n: number, day: string, change: (output: number) => number = (output) => output): string[] {
  const values = expected.pooledDevices[serial(n)];
  return golden
    .read("readings-sample.csv")
    .toString("utf8")
    .trim()
    .split("\n")
    .filter((line) => line.startsWith(serial(n)))
    .map((line) => {
      const [, point, chamber, soak, deviceTemp, load, signal, at] = line.split(",") as string[];
      const d = values.tempOffset + values.tempSlope * Number(deviceTemp) - golden.family.referenceC;
      const output = (Number(signal) - values.zero - values.zeroTc * d) * values.gain * (1 + values.gainTc * d);
      const time = `${day}${at?.slice(10)}`;
      return [serial(n), point, chamber, soak, deviceTemp, load, signal, time, change(output)].join(",");
    });
}

async function uploadProof(rows: string[]): Promise<string> {
  const body = [HEADER, ...rows].join("\n");
  const reply = await api.call("POST", `/lots/${LOT}/runs`, {
    as: "engineer",
    query: { purpose: "proof" },
    body,
    headers: CSV,
  });
  expect(reply.status).toBe(201);
  return reply.body.id;
}

async function write(n: number, finishedAt: string, change: Record<string, unknown> = {}) {
  const times = { startedAt: finishedAt, finishedAt };
  const { body } = await sendWrites(api, station, [
    await reportOf(api, { package: live, serial: serial(n) }, { ...times, ...change }),
  ]);
  return body.results[0].outcome;
}

const proofOf = async (run: string) => (await api.call("GET", `/runs/${run}/proof`, { as: "auditor" })).body;
const lotProofs = async () => (await api.call("GET", `/lots/${LOT}/proofs`, { as: "service" })).body;

describe("proof of written devices", () => {
  it("is open as long as nothing was read", async () => {
    const { live: state, items } = await lotProofs();
    expect(items).toEqual([]);
    expect(state).toMatchObject({ layout: golden.layoutVersion, firmware: "2.3.0", state: "open", agreed: 0 });
  });

  it("agrees where the output is that of an independent program with the same coefficients", async () => {
    expect(await write(1, "2026-04-01T08:00:00.000Z")).toBe("verified");
    const run = await uploadProof(proofRows(1, "2026-04-02"));
    const { counts, devices, lot } = await proofOf(run);
    expect({ lot, counts }).toEqual({ lot: LOT, counts: { agrees: 1, differs: 0, notJudged: 0 } });
    expect(devices[0]).toMatchObject({
      serial: serial(1),
      state: "agrees",
      package: live,
      version: "1.0.0",
      firmware: "2.3.0",
    });
    // Only the rounding of the image is left.
    expect(devices[0].worst.ratio).toBeLessThan(0.02);
    const shown = devices[0].shown.filter((one: { shown: boolean }) => one.shown);
    expect(shown.map((one: { name: string }) => one.name)).toEqual(["zero", "gain", "gainTc"]);
    expect((await lotProofs()).live).toMatchObject({
      state: "agrees",
      run,
      agreed: 1,
      differed: 0,
      notShown: ["zeroTc"],
    });
  });

  it("judges by what the device carried when it was read, not by what came later", async () => {
    const run = await uploadProof(proofRows(2, "2026-04-02"));
    expect((await proofOf(run)).devices[0]).toMatchObject({ state: "not-judged", package: null, worst: null });
    await write(2, "2026-04-03T08:00:00.000Z");
    expect((await proofOf(run)).devices[0].reason).toBe("No station had written it when it was read.");
  });

  it("counts a record that arrives after the readings", async () => {
    const run = await uploadProof(proofRows(3, "2026-04-02"));
    expect((await proofOf(run)).counts.notJudged).toBe(1);
    await write(3, "2026-04-01T09:00:00.000Z", { counter: 900 });
    expect((await proofOf(run)).counts).toEqual({ agrees: 1, differs: 0, notJudged: 0 });
  });

  it("doesn't judge a device whose memory is unknown", async () => {
    await write(4, "2026-04-01T10:00:00.000Z", { result: "interrupted", readbackSha256: null });
    const run = await uploadProof(proofRows(4, "2026-04-02"));
    expect((await proofOf(run)).devices[0]).toMatchObject({
      state: "not-judged",
      reason: expect.stringContaining("unknown"),
    });
  });

  it("differs where the firmware does otherwise, and says so for the lot", async () => {
    await write(5, "2026-04-01T11:00:00.000Z", { counter: 901 });
    const run = await uploadProof(proofRows(5, "2026-04-04", (output) => output * 1.002));
    const { counts, devices } = await proofOf(run);
    expect(counts.differs).toBe(1);
    expect(devices[0].worst.ratio).toBeGreaterThan(1);
    expect((await lotProofs()).live).toMatchObject({ state: "differs", run, differed: 1 });
    const { body: today } = await api.call("GET", "/today", { as: "engineer" });
    expect(today.trouble[0]).toMatchObject({ title: `Proof of ${LOT}`, tone: "bad", link: `/runs/${run}` });
  });

  it("lets a corrected run take the place of the one before", async () => {
    const wrong = (await lotProofs()).live.run;
    const reply = await api.call("POST", `/lots/${LOT}/runs`, {
      as: "engineer",
      query: { purpose: "proof", supersedes: wrong, reason: "Reader was set to another cell" },
      body: [HEADER, ...proofRows(5, "2026-04-05")].join("\n"),
      headers: CSV,
    });
    expect(reply.status).toBe(201);
    expect((await lotProofs()).live).toMatchObject({ state: "agrees", differed: 0 });
    const { body: today } = await api.call("GET", "/today", { as: "engineer" });
    expect(today.trouble.map((item: { title: string }) => item.title)).not.toContain(`Proof of ${LOT}`);
  });

  it("stands among the checks of packages built with the same layout for the same firmware", async () => {
    const { id } = await buildGolden(people, derived);
    const { checks } = (await api.call("GET", `/packages/${id}`, { as: "reviewer" })).body;
    const check = checks.find((one: { code: string }) => one.code === "first-off");
    expect(check).toMatchObject({ verdict: "pass", evidence: { state: "agrees", differed: 0 } });
    const first = (await api.call("GET", `/packages/${live}`, { as: "reviewer" })).body.checks;
    expect(first.map((one: { code: string }) => one.code)).not.toContain("first-off");
  });

  it("answers 409 for a run that is no proof, 404 for none, 401 without a session", async () => {
    const other = await api.call("GET", `/runs/${sampleRun}/proof`, { as: "engineer" });
    expect([other.status, other.body.code]).toEqual([409, "run.no_proof"]);
    const none = await api.call("GET", `/runs/${uuidv7()}/proof`, { as: "engineer" });
    expect([none.status, none.body.code]).toEqual([404, "run.not_found"]);
    expect((await api.call("GET", `/runs/${sampleRun}/proof`)).status).toBe(401);
    expect((await api.call("GET", "/lots/NO-SUCH/proofs", { as: "engineer" })).status).toBe(404);
  });
});
