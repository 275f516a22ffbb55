import { beforeAll, describe, expect, it } from "vitest";
import { getDerivationChart } from "@/lib/services/derivations/get-derivation-chart";
import { getDeviceEvidence } from "@/lib/services/derivations/get-device-evidence";
import { listDeciderNames } from "@/lib/services/derivations/list-deciders";
import { runDerivation } from "@/lib/services/derivations/run-derivation";
import { startDerivation } from "@/lib/services/derivations/start-derivation";
import { openTestApi, type TestApi } from "../support/api";
import { systemContext } from "../support/jobs";
import { PASSWORD } from "../support/people";
import { deriveGolden, type ReadLot, uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import { firstGolden } from "../support/scenario/golden";

let api: TestApi;
let people: ScenarioPeople;
let read: ReadLot;
let id: string;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  read = await uploadGoldenRuns(people, await arrangeFamilyLot(people));
  id = (await deriveGolden(people, read, [{ serial: "MW20-2609-00005", reason: "Connector loose" }])).derivation;
});

describe("what the charts of a derivation draw", () => {
  it("is every loaded device by itself, and the range of all others", async () => {
    const chart = await getDerivationChart(people.reviewer, id);
    expect(chart.devices.map((device) => device.role).sort()).toEqual([
      "excluded",
      ...Array(9).fill("sample"),
      ...Array(4).fill("verification"),
    ]);
    expect(chart.loaded).toBe(14);
    expect(chart.devices.find((device) => device.role === "excluded")).toMatchObject({ curves: null, residuals: null });
    expect(chart.gathered).toMatchObject({ devices: 14, others: 0 });
    // The zero run's two points and, between them, the unloaded reading of the span run near the reference.
    const range = chart.gathered?.zeroIntervals ?? [];
    expect(range).toHaveLength(3);
    expect(range[1]).toMatchObject({ before: [0, 0] });
    // Two points leave no freedom: after compensation nothing is left at them, before there is.
    for (const { before, after } of [range[0], range[2]].filter((one) => one !== undefined)) {
      expect(before[1] - before[0]).toBeGreaterThan(0.5);
      expect(Math.max(Math.abs(after[0]), Math.abs(after[1]))).toBeLessThan(1e-6);
    }
  });

  it("is not there for what is not", async () => {
    await expect(getDerivationChart(people.reviewer, "nonsense")).rejects.toMatchObject({
      code: "derivation.not_found",
    });
  });
});

describe("what a device's coefficients rest on", () => {
  it("is its readings of every run, with the devices before and after it", async () => {
    const evidence = await getDeviceEvidence(people.reviewer, id, "MW20-2609-00011");
    expect(new Set(evidence.readings.map((one) => one.purpose))).toEqual(new Set(["zero", "span"]));
    expect(evidence.readings.every((one) => Object.values(read.runs).includes(one.runId))).toBe(true);
    expect([evidence.previous, evidence.next]).toEqual(["MW20-2609-00010", "MW20-2609-00012"]);
    expect(evidence.zeroCovariance).toBeNull();
    expect((await getDeviceEvidence(people.reviewer, id, "MW20-2609-00001")).previous).toBeNull();
    expect((await getDeviceEvidence(people.reviewer, id, "MW20-2609-00028")).next).toBeNull();
    await expect(getDeviceEvidence(people.reviewer, id, "NOBODY")).rejects.toMatchObject({
      code: "coefficients.not_found",
    });
  });

  it("tells how zero and zeroTc hang together where a degree of freedom allows it", async () => {
    await api.call("POST", "/lots", {
      as: "engineer",
      body: { code: "MW20-26Q2", family: "MW-20", firmware: "2.3.0" },
    });
    const run = await api.call("POST", "/lots/MW20-26Q2/runs", {
      as: "engineer",
      query: { purpose: "sample", addDevices: true },
      headers: { "content-type": "text/csv" },
      body: firstGolden().read("readings-three-points.csv"),
    });
    const options = {
      lot: "MW20-26Q2",
      method: "individual" as const,
      order: 1 as const,
      runs: [run.body.id],
      exclude: [],
    };
    const derived = await startDerivation(people.engineer, options);
    await runDerivation(systemContext(api.db), { derivationId: derived.id });
    const { zeroCovariance } = await getDeviceEvidence(people.reviewer, derived.id, "MW20-26Q2-00001");
    const reply = await api.call("GET", `/derivations/${derived.id}/devices/MW20-26Q2-00001`, { as: "reviewer" });
    const { zero, zeroTc } = reply.body.uncertainty;
    // Of its definition: the covariance is the correlation times both standard errors.
    expect(zeroCovariance?.covariance).toBeCloseTo((zeroCovariance?.correlation ?? 0) * zero * zeroTc, 20);
    expect(Math.abs(zeroCovariance?.correlation ?? 2)).toBeLessThan(1);
    // Simple regression: the correlation has the sign of minus the mean of d (theory of least squares, from memory).
    const meanC = reply.body.points.reduce((sum: number, point: { chamberC: number }) => sum + point.chamberC / 3, 0);
    expect(Math.sign(zeroCovariance?.correlation ?? 0)).toBe(-Math.sign(meanC - 20));
  });
});

it("names who may decide: reviewers who had no hand in it", async () => {
  expect(await listDeciderNames(people.engineer, id)).toEqual(["reviewer", "reviewer2"]);
  const { v7 } = await import("uuid");
  const maker = {
    id: v7(),
    subjectKind: "derivation",
    subjectId: id,
    personId: api.people.reviewer2.id,
    act: "uploaded",
  };
  await api.db
    .insertInto("maker")
    .values({ ...maker, at: new Date() })
    .execute();
  expect(await listDeciderNames(people.engineer, id)).toEqual(["reviewer"]);
});
