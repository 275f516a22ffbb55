import { beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { approveDerivation, deriveGolden, type ReadLot, uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, arrangeSecondFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import { firstGolden, secondGolden } from "../support/scenario/golden";

// biome-ignore lint/suspicious/noExplicitAny: replies are looked at member by member; the routes check them themselves.
type Reply = any;

let api: TestApi;
let people: ScenarioPeople;
let read: ReadLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  read = await uploadGoldenRuns(people, await arrangeFamilyLot(people));
});

type Values = Record<string, number>;

/** Agreement as the example's description asks for it: relative 1e-9, absolute 1e-12 near zero. */
function expectAgree(actual: Values | null, expected: Values, serial: string): void {
  expect(Object.keys(actual ?? {}).sort(), serial).toEqual(Object.keys(expected).sort());
  for (const [name, value] of Object.entries(expected)) {
    const limit = Math.max(1e-12, Math.abs(value) * 1e-9);
    expect(Math.abs((actual?.[name] ?? Number.NaN) - value), `${serial} ${name}`).toBeLessThanOrEqual(limit);
  }
}

/** Waits out the job as the worker would. */
async function derive(lot: string, body: object): Promise<{ id: string; body: Reply }> {
  const started = await api.call("POST", `/lots/${lot}/derivations`, { as: "engineer", body });
  expect(started.status, JSON.stringify(started.body)).toBe(202);
  expect(started.body).toEqual({ id: expect.any(String), state: "working" });
  await api.runJobs();
  return {
    id: started.body.id,
    body: (await api.call("GET", `/derivations/${started.body.id}`, { as: "auditor" })).body,
  };
}

async function devicesOf(id: string): Promise<Reply[]> {
  const items: Reply[] = [];
  for (let cursor: string | null = ""; cursor !== null; ) {
    const query: Record<string, string | number> = cursor === "" ? { limit: 7 } : { limit: 7, cursor };
    const page: Reply = (await api.call("GET", `/derivations/${id}/devices`, { as: "auditor", query })).body;
    items.push(...page.items);
    cursor = page.next;
  }
  return items;
}

const decide = (id: string, body: object, as: "reviewer" | "reviewer2" | "engineer" = "reviewer") =>
  api.call("POST", `/derivations/${id}/decisions`, { as, body: { password: PASSWORD, ...body } });

/** Soft findings accepted by their codes. */
const accept = (body: Reply) =>
  [...new Set(body.findings.filter((one: Reply) => one.severity === "soft").map((one: Reply) => one.code))].map(
    (finding) => ({
      finding,
      reason: "Looked at",
    }),
  );

describe("golden lot MW20-2609, pooled gain", () => {
  it("agrees with the independent program in every coefficient, the pool and the verification", async () => {
    const expected = JSON.parse(read.read("expected-coefficients.json").toString());
    const { id, body } = await derive(read.lot, { method: "pooled-gain", order: 1, runs: Object.values(read.runs) });
    expect(body).toMatchObject({
      state: "proposed",
      method: "pooled-gain",
      order: 1,
      sha256: expect.stringMatching(/^[0-9a-f]{64}$/),
    });
    const { gainTc, sd, n, meanGain, limit } = expected.pooled;
    expectAgree(
      {
        gainTc: body.pooled.gainTc,
        sd: body.pooled.sd,
        n: body.pooled.n,
        meanGain: body.pooled.meanGain,
        limit: body.pooled.limit,
      },
      { gainTc, sd, n, meanGain, limit },
      "pooled",
    );
    expect(body.pooled.toleranceFactor).toBeCloseTo(expected.pooled.toleranceFactor9595, 7);
    expect(body.pooled).toMatchObject({ coverage: 0.95, confidence: 0.95, verdict: "inside" });
    expect(body.provenRange).toEqual([8.06, 41.9]);
    const devices = await devicesOf(id);
    expect(devices).toHaveLength(28);
    for (const { serial, coefficients, state } of devices) {
      expect(state).toBe("proposed");
      expectAgree(coefficients, expected.pooledDevices[serial], serial);
    }
    expect(body.verification.map((one: Reply) => one.serial)).toEqual(Object.keys(expected.verification));
    for (const one of body.verification) {
      const { spanErrorPpm, spanRatio, zeroShiftRatio } = expected.verification[one.serial];
      expectAgree(
        { spanErrorPpm: one.spanErrorPpm, spanRatio: one.spanRatio },
        { spanErrorPpm, spanRatio },
        one.serial,
      );
      expect(one).toMatchObject({ zeroShiftRatio, passed: true, judged: ["spanRatio"] });
    }
    expect(body.counts).toMatchObject({
      devices: 28,
      withValues: 28,
      roles: { sample: 10, zero: 14, verification: 4 },
      states: { proposed: 28 },
    });
  });

  it("agrees for the individual trim of the sample, with nothing claimed about its own errors", async () => {
    const expected = JSON.parse(read.read("expected-coefficients.json").toString());
    const { id, body } = await derive(read.lot, { method: "individual", order: 1, runs: [read.runs.sample] });
    expect(body.pooled).toBeUndefined();
    const devices = await devicesOf(id);
    expect(devices.map((one) => one.serial)).toEqual(Object.keys(expected.individual));
    for (const device of devices) {
      expectAgree(device.coefficients, expected.individual[device.serial], device.serial);
      expect(device).toMatchObject({ spanErrorPpm: null, spanRatio: null, zeroShiftRatio: null });
      expect(device.uncertainty).toMatchObject({ zeroTc: null, gainTc: null, degreesOfFreedomGain: 0 });
    }
  });

  it("shows one device with its points and drift curves", async () => {
    const { id } = await derive(read.lot, { method: "pooled-gain", order: 1, runs: Object.values(read.runs) });
    const reply = await api.call("GET", `/derivations/${id}/devices/mw20-2609-00001`, { as: "service" });
    expect(reply.status).toBe(200);
    expect(reply.body.points).toHaveLength(2);
    expect(reply.body.curves.spanPpm.after).toHaveLength(2);
    expect(reply.body.covariance).toEqual({ zero: null, gain: null });
    expect((await api.call("GET", `/derivations/${id}/devices/NOBODY`, { as: "service" })).status).toBe(404);
  });

  it("previews the same numbers and stores nothing", async () => {
    const body = { method: "pooled-gain", order: 1, runs: Object.values(read.runs) };
    const before = await api.db.selectFrom("derivation").select("id").execute();
    const reply = await api.call("POST", `/lots/${read.lot}/derivations`, {
      as: "engineer",
      body,
      query: { preview: true },
    });
    expect(reply.status).toBe(200);
    expect(reply.body.devices).toHaveLength(28);
    expect(reply.body.pooled.n).toBe(10);
    const { lines, combined, expanded, coverageFactor, missing, chamber, ends } = reply.body.uncertainty;
    expect(lines.map((one: Reply) => one.source)).toContain("sample.scatter");
    // The golden runs name no equipment, have no return, and two temperatures: none of that is known, and none is 0.
    expect(missing).toEqual([
      "sensor.common",
      "sensor.independent",
      "chamber.uniformity",
      "load.certificate",
      "reader.certificate",
      "zero.return",
      "device.thermometer",
    ]);
    expect(expanded.gainTc).toBe(combined.gainTc * coverageFactor.gainTc);
    expect(ends.map((one: Reply) => one.temperatureC)).toEqual(reply.body.provenRange);
    expect(chamber).toMatchObject({ individual: 0, pooled: null, perKelvin: expect.closeTo(1.137, 3) });
    expect(reply.body.envelope.before.span.ratio).toBeGreaterThan(1);
    expect(reply.body.envelope.after.span.ratio).toBeLessThan(1);
    expect(await api.db.selectFrom("derivation").select("id").execute()).toHaveLength(before.length);
    const stored = await derive(read.lot, body);
    expect(stored.body.sha256).toBe(reply.body.sha256);
    expect(stored.body.uncertainty).toEqual(reply.body.uncertainty);
    expect(stored.body.envelope).toEqual(reply.body.envelope);
  });
});

describe("the other golden examples", () => {
  it("agrees for lot MW300-2610 with an exclusion and devices never loaded", async () => {
    const golden = await arrangeSecondFamilyLot(people);
    const second = await uploadGoldenRuns(people, golden);
    const expected = JSON.parse(second.read("expected-coefficients.json").toString());
    const exclude = expected.exclude.map((serial: string) => ({ serial, reason: "Connector loose" }));
    const { id, body } = await derive(second.lot, {
      method: "pooled-gain",
      order: 1,
      runs: Object.values(second.runs),
      exclude,
    });
    expect(body.pooled.n).toBe(expected.pooled.n);
    expect(body.exclude).toEqual([{ serial: expected.exclude[0], reason: "Connector loose", by: "engineer" }]);
    expect(body.makers.map((one: Reply) => one.act).sort()).toEqual(["derived", "excluded", "uploaded"]);
    const devices = await devicesOf(id);
    for (const { serial, coefficients, role, state, findings, spanRatio } of devices) {
      if (expected.exclude.includes(serial)) {
        expect({ role, coefficients, state }).toEqual({ role: "excluded", coefficients: null, state: null });
      } else expectAgree(coefficients, expected.pooledDevices[serial], serial);
      if (expected.neverLoaded.includes(serial)) {
        expect(findings.map((one: Reply) => one.code)).toContain("gain.not_trimmed");
        expect(spanRatio).toBeNull();
      }
    }
    for (const one of body.verification) {
      const { spanErrorPpm, spanRatio } = expected.verification[one.serial];
      expectAgree(
        { spanErrorPpm: one.spanErrorPpm, spanRatio: one.spanRatio },
        { spanErrorPpm, spanRatio },
        one.serial,
      );
    }
  });

  it("agrees for order 2 at three temperatures", async () => {
    const golden = firstGolden();
    const lot = "MW20-26Q2";
    expect(
      (await api.call("POST", "/lots", { as: "engineer", body: { code: lot, family: "MW-20", firmware: "2.3.0" } }))
        .status,
    ).toBe(201);
    const run = await api.call("POST", `/lots/${lot}/runs`, {
      as: "engineer",
      query: { purpose: "sample", addDevices: true },
      headers: { "content-type": "text/csv" },
      body: golden.read("readings-three-points.csv"),
    });
    expect(run.status).toBe(201);
    expect(run.body.added).toBe(run.body.devices);
    const expected = JSON.parse(golden.read("expected-coefficients-three-points.json").toString());
    const { id } = await derive(lot, { method: "individual", order: 2, runs: [run.body.id] });
    const devices = await devicesOf(id);
    expect(devices).toHaveLength(Object.keys(expected.individual).length);
    for (const { serial, coefficients } of devices) expectAgree(coefficients, expected.individual[serial], serial);
  });
});

describe("what stands on the runs", () => {
  it("comes to who decides: the chamber off its plan, equipment overdue, and its share of the budget by place", async () => {
    const lot = "MW20-26P1";
    await api.call("POST", "/lots", { as: "engineer", body: { code: lot, family: "MW-20", firmware: "2.3.0" } });
    const [head = "", ...rows] = firstGolden().read("readings-three-points.csv").toString().trim().split(/\r?\n/);
    const csv = [`${head},position`, ...rows.map((row) => `${row.replace("26Q2", "26P1")},A1`)].join("\n");
    const serials = [...new Set(rows.map((row) => row.slice(0, row.indexOf(",")).replace("26Q2", "26P1")))];
    expect((await api.call("POST", `/lots/${lot}/devices`, { as: "engineer", body: { serials } })).status).toBe(200);
    const positions = [{ position: "A1", deviationK: 0.3, uncertaintyK: 0.8 }];
    const chamber = {
      code: "CH-P1",
      kind: "chamber",
      certificate: "K-9",
      calibratedUntil: "2020-01-01",
      uncertainty: 1,
    };
    await api.call("POST", "/equipment", { as: "engineer", body: { ...chamber, coverageFactor: 2, positions } });
    const point = (n: number, setC: number) => {
      return { point: n, setC, soakMin: 90, loadsKg: [12], repeats: 2, dwellS: 30 };
    };
    const devices = serials.map((serial, i) => ({ serial, position: `A${i + 1}` }));
    const plan = await api.call("POST", `/lots/${lot}/run-plans`, {
      as: "engineer",
      body: {
        name: "three",
        purpose: "sample",
        devices,
        points: [point(1, 13), point(2, 25), point(3, 40)],
        equipment: [],
      },
    });
    expect(plan.status, JSON.stringify(plan.body)).toBe(201);
    const run = await api.call("POST", `/lots/${lot}/runs`, {
      as: "engineer",
      query: { purpose: "sample", equipment: "CH-P1", plan: plan.body.id },
      headers: { "content-type": "text/csv" },
      body: csv,
    });
    expect(run.status, JSON.stringify(run.body)).toBe(201);
    const { body } = await derive(lot, { method: "individual", order: 2, runs: [run.body.id] });
    const codes = body.findings.map((one: Reply) => `${one.severity} ${one.code} ${one.point}`);
    expect(codes).toContain("soft chamber.off_set_point 1");
    expect(codes).toContain("soft equipment.overdue null");
    expect(codes).toContain("soft plan.position_differs null");
    expect(codes).not.toContain("soft chamber.off_set_point 2");
    const place = body.uncertainty.lines.find((one: Reply) => one.source === "chamber.uniformity");
    expect(place).toMatchObject({ standard: expect.closeTo(0.5, 9), intervals: 0, gainTc: expect.any(Number) });
    expect(body.uncertainty.chamber.pooled).toBeGreaterThan(0);
  });
});

describe("asking for a derivation", () => {
  const body = () => ({ method: "pooled-gain", order: 1, runs: [read.runs.sample] });
  const ask = (change: object, as: "engineer" | "reviewer" = "engineer") =>
    api.call("POST", `/lots/${read.lot}/derivations`, { as, body: { ...body(), ...change } });

  it.each([
    ["no order", { order: undefined }, 422, "request.invalid"],
    ["order 3", { order: 3 }, 422, "request.invalid"],
    ["no run", { runs: [] }, 422, "request.invalid"],
    ["a run that is not there", { runs: ["0192f3a0-0000-7000-8000-000000000000"] }, 404, "run.not_found"],
    [
      "a serial excluded that the lot has not",
      { exclude: [{ serial: "NOBODY", reason: "x" }] },
      422,
      "derivation.exclude_unknown",
    ],
    ["an exclusion without reason", { exclude: [{ serial: "MW20-2609-00001", reason: " " }] }, 422, "request.invalid"],
    ["an unknown member", { colour: 1 }, 422, "request.invalid"],
  ])("refuses %s", async (_, change, status, code) => {
    const reply = await ask(change);
    expect([reply.status, reply.body.code]).toEqual([status, code]);
  });

  it("is the engineer's, and reading is not the operator's", async () => {
    expect((await ask({}, "reviewer")).status).toBe(403);
    expect((await api.call("POST", `/lots/${read.lot}/derivations`, { body: body() })).status).toBe(401);
    expect((await api.call("GET", `/lots/${read.lot}/derivations`, { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", `/lots/${read.lot}/derivations`, { as: "auditor" })).status).toBe(200);
    expect((await api.call("GET", "/derivations/0192f3a0-0000-7000-8000-000000000000", { as: "auditor" })).status).toBe(
      404,
    );
    expect(
      (await api.call("GET", `/lots/${read.lot}/derivations`, { as: "auditor", query: { cursor: "x" } })).status,
    ).toBe(422);
  });

  it("ends as failed, with the reason, where the readings can't carry it, and is not derived twice", async () => {
    const { body: derived, id } = await derive(read.lot, { ...body(), runs: [read.runs.verification] });
    expect(derived.state).toBe("proposed");
    expect(derived.findings.map((one: Reply) => one.code)).toContain("sample.too_small");
    const { runDerivation } = await import("@/lib/services/derivations/run-derivation");
    const { systemContext } = await import("../support/jobs");
    await runDerivation(systemContext(api.db), { derivationId: id });
    expect((await devicesOf(id)).length).toBe(4);
  });
});

describe("deciding on a derivation", () => {
  const fresh = async () => {
    const { derivation: id } = await deriveGolden(people, read);
    return { id, body: (await api.call("GET", `/derivations/${id}`, { as: "reviewer" })).body };
  };

  it("approves all sets once, with the makers and the decision on record", async () => {
    const { id, body } = await fresh();
    expect(body.mayDecide).toBe(true);
    const reply = await decide(id, { decision: "approve", acknowledge: accept(body) });
    expect(reply.status, JSON.stringify(reply.body)).toBe(200);
    expect(reply.body).toMatchObject({ state: "approved", counts: { states: { approved: 28 } } });
    expect(reply.body.approvals).toMatchObject([{ decision: "approve", name: "reviewer" }]);
    const again = await decide(id, { decision: "approve", acknowledge: accept(body) }, "reviewer2");
    expect([again.status, again.body.code]).toEqual([409, "derivation.wrong_state"]);
    const events = await api.db
      .selectFrom("ledgerEvent")
      .select("action")
      .where("subject", "=", id)
      .orderBy("seq")
      .execute();
    expect(events.map((one) => one.action)).toEqual([
      "derivation.started",
      "derivation.proposed",
      "coefficients.approved",
    ]);
  });

  it("lets only one of two reviewers at the same moment approve", async () => {
    const { id, body } = await fresh();
    const input = { decision: "approve", acknowledge: accept(body) };
    const replies = await Promise.all([decide(id, input), decide(id, input, "reviewer2")]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 409]);
    expect(await api.db.selectFrom("approval").select("id").where("subjectId", "=", id).execute()).toHaveLength(1);
  });

  it("approves some devices, refuses another, and revokes later", async () => {
    const { id, body } = await fresh();
    const some = await decide(id, {
      decision: "approve",
      serials: ["mw20-2609-00001", "MW20-2609-00002"],
      acknowledge: accept(body),
    });
    expect(some.body).toMatchObject({ state: "partly-approved", counts: { states: { approved: 2, proposed: 26 } } });
    const refused = await decide(
      id,
      { decision: "refuse", serials: ["MW20-2609-00003"], reason: "Looks odd" },
      "reviewer2",
    );
    expect(refused.body.counts.states).toEqual({ approved: 2, proposed: 25, refused: 1 });
    const twice = await decide(id, { decision: "approve", serials: ["MW20-2609-00003"], acknowledge: accept(body) });
    expect([twice.status, twice.body.code]).toEqual([409, "derivation.wrong_state"]);
    const unknown = await decide(id, { decision: "approve", serials: ["NOBODY"] });
    expect([unknown.status, unknown.body.code]).toEqual([422, "derivation.serial_unknown"]);
    const revoked = await decide(id, { decision: "revoke", reason: "Sensor was off" });
    expect(revoked.body.counts.states).toEqual({ revoked: 2, proposed: 25, refused: 1 });
  });

  it("refuses makers, other roles, keys' absence of a session, wrong passwords and missing reasons, writing nothing", async () => {
    const { id } = await fresh();
    expect((await decide(id, { decision: "approve" }, "engineer")).status).toBe(403);
    expect((await decide(id, { decision: "refuse" })).status).toBe(422);
    const wrong = await decide(id, { decision: "approve", password: "not it" });
    expect([wrong.status, wrong.body.code]).toEqual([403, "auth.password_wrong"]);
    expect((await api.call("POST", `/derivations/${id}/decisions`, { body: {} })).status).toBe(401);
    expect(await api.db.selectFrom("approval").select("id").where("subjectId", "=", id).execute()).toEqual([]);
    expect((await api.call("GET", `/derivations/${id}`, { as: "auditor" })).body.state).toBe("proposed");
  });

  it("refuses a reviewer who uploaded one of its runs", async () => {
    const { id } = await fresh();
    const { v7 } = await import("uuid");
    const maker = {
      id: v7(),
      subjectKind: "derivation",
      subjectId: id,
      personId: api.people.reviewer2.id,
      act: "uploaded",
      at: new Date(),
    };
    await api.db.insertInto("maker").values(maker).execute();
    const reply = await decide(id, { decision: "approve" }, "reviewer2");
    expect([reply.status, reply.body.code]).toEqual([403, "derivation.self_approval"]);
    expect((await api.call("GET", `/derivations/${id}`, { as: "reviewer2" })).body.mayDecide).toBe(false);
  });

  it("blocks approval by hard findings and asks for reasons for soft ones", async () => {
    const hard = (await derive(read.lot, { method: "pooled-gain", order: 1, runs: [read.runs.verification] })).body;
    const blocked = await decide(hard.id, { decision: "approve" });
    expect([blocked.status, blocked.body.code]).toEqual([409, "derivation.hard_finding"]);
    expect(blocked.body.findings.map((one: Reply) => one.code)).toContain("sample.too_small");

    const soft = (
      await derive(read.lot, {
        method: "pooled-gain",
        order: 1,
        runs: [read.runs.sample, read.runs.zero, read.runs.span],
      })
    ).body;
    expect(soft.findings.map((one: Reply) => one.code)).toContain("verification.missing");
    const missing = await decide(soft.id, { decision: "approve" });
    expect([missing.status, missing.body.code]).toEqual([409, "derivation.not_acknowledged"]);
    const unknown = await decide(soft.id, { decision: "approve", acknowledge: [{ finding: "no.such", reason: "x" }] });
    expect([unknown.status, unknown.body.code]).toEqual([422, "derivation.finding_unknown"]);
    const done = await decide(soft.id, {
      decision: "approve",
      acknowledge: missing.body.findings.map((one: Reply) => ({ finding: one.id, reason: "Known" })),
    });
    expect(done.status, JSON.stringify(done.body)).toBe(200);
    expect(done.body.acknowledgements.length).toBe(missing.body.count);
  });

  it("can't be decided while it is being computed", async () => {
    const started = await api.call("POST", `/lots/${read.lot}/derivations`, {
      as: "engineer",
      body: { method: "pooled-gain", order: 1, runs: Object.values(read.runs) },
    });
    const reply = await decide(started.body.id, { decision: "approve" });
    expect([reply.status, reply.body.code]).toEqual([409, "derivation.running"]);
    await api.runJobs();
    await approveDerivation(people, started.body.id);
  });
});

it("keeps other lots' runs out", async () => {
  const golden = secondGolden();
  expect(golden.lot).toBe("MW300-2610");
  const { body } = await api.call("GET", `/lots/${golden.lot}/runs`, { as: "engineer" });
  const reply = await api.call("POST", `/lots/${read.lot}/derivations`, {
    as: "engineer",
    body: { method: "individual", order: 1, runs: [body.items[0].id] },
  });
  expect([reply.status, reply.body.code]).toEqual([422, "derivation.run_of_other_lot"]);
});
