import { parse } from "csv-parse/sync";
import { beforeAll, describe, expect, it } from "vitest";
import { ALL_COLUMNS } from "@/lib/domain/readings/map-table";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeFamilyLot, arrangeSecondFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import type { GoldenLot } from "../support/scenario/golden";

// biome-ignore lint/suspicious/noExplicitAny: replies are looked at member by member; the routes check them themselves.
type Reply = any;

let api: TestApi;
let golden: GoldenLot;
let other: GoldenLot;

beforeAll(async () => {
  api = await openTestApi();
  const people: ScenarioPeople = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  golden = await arrangeFamilyLot(people);
  other = await arrangeSecondFamilyLot(people);
  for (const [code, kind, calibratedUntil] of [
    ["TS-01", "sensor", "2099-01-01"],
    ["CH-02", "chamber", "2020-01-01"],
  ])
    await api.call("POST", "/equipment", {
      as: "engineer",
      body: { code, kind, certificate: "K-1", calibratedUntil, uncertainty: 0.05 },
    });
});

const point = (n: number, setC: number, more: object = {}) => ({
  point: n,
  setC,
  soakMin: 240,
  loadsKg: [20],
  repeats: 1,
  dwellS: 30,
  ...more,
});
const devicesFrom = (from: number, count: number) =>
  golden.serials.slice(from, from + count).map((serial, index) => ({ serial, position: `P${index + 1}` }));
const planOf = (name: string, more: object = {}) => ({
  name,
  purpose: "sample",
  devices: devicesFrom(0, 5),
  points: [point(1, -10), point(2, 20), point(3, 40), point(4, -10)],
  equipment: ["TS-01"],
  ...more,
});
const plan = (body: object, as: PersonName | null = "engineer", lot = golden.lot) =>
  api.call("POST", `/lots/${lot}/run-plans`, { ...(as && { as }), body });
const get = async (id: string) => (await api.call("GET", `/run-plans/${id}`, { as: "auditor" })).body;
const drop = (id: string, reason = "chamber broken", as: PersonName = "engineer") =>
  api.call("POST", `/run-plans/${id}/drop`, { as, body: { reason } });
const countPlans = async () => (await api.db.selectFrom("runPlan").select("id").execute()).length;
const codes = (body: Reply) => body.findings.map((finding: Reply) => finding.code);

const templateOf = async (id: string) => {
  const reply = await api.call("GET", `/run-plans/${id}/template`, { as: "auditor" });
  return { reply, rows: parse(reply.body, { columns: true }) as Record<string, string>[] };
};

/** The template filled in as a reader would, one change a row allowed. */
async function readingsOf(id: string, change: (row: Record<string, string>, index: number) => object | null) {
  const { rows } = await templateOf(id);
  const set = new Map(((await get(id)).points as Reply[]).map((one) => [String(one.point), one.setC]));
  const filled = rows.map((row, index) => {
    const setC = set.get(row.point as string) as number;
    return {
      ...row,
      chamber_c: `${setC + 0.1}`,
      soak_min: "245",
      device_temp: `${1900 + setC * 8 + index * 0.001}`,
      signal_mv_v: (Number(row.load_kg) * 0.1 + index * 1e-6).toFixed(7),
      taken_at: new Date(Date.UTC(2026, 10, 2, 6, index)).toISOString(),
      dwell_s: "30",
    } as Record<string, string>;
  });
  const kept = filled
    .map((row, index) => ({ row, changed: change(row, index) }))
    .filter(({ changed }) => changed !== null);
  const header = Object.keys(filled[0] as object);
  const lines = kept.map(({ row, changed }) => header.map((name) => ({ ...row, ...changed })[name] ?? "").join(","));
  return [header.join(","), ...lines].join("\n");
}
const upload = (body: string, query: Record<string, string>, lot = golden.lot) =>
  api.call("POST", `/lots/${lot}/runs`, {
    as: "engineer",
    body,
    headers: { "content-type": "text/csv" },
    query: { purpose: "sample", equipment: "TS-01", ...query },
  });

describe("planning a run", () => {
  it("keeps devices and points in working order and says what is to be said", async () => {
    const { status, body } = await plan(
      planOf("Sample 1", { equipment: ["TS-01", "ch-02"], notes: "door seal is new" }),
    );
    expect(status, JSON.stringify(body)).toBe(201);
    expect(body).toMatchObject({
      lot: golden.lot,
      name: "Sample 1",
      purpose: "sample",
      state: "planned",
      deviceCount: 5,
      devices: devicesFrom(0, 5),
      rows: 40,
      notes: "door seal is new",
      runs: [],
      dropped: null,
      createdBy: "engineer",
    });
    expect(body.points).toEqual([point(1, -10), point(2, 20), point(3, 40), point(4, -10)]);
    expect(body.equipment.map((one: Reply) => one.code)).toEqual(["CH-02", "TS-01"]);
    expect(codes(body)).toEqual(["plan.no_repeats", "plan.equipment_overdue"]);
    const event = await api.db
      .selectFrom("ledgerEvent")
      .select(["action", "canonical"])
      .where("subject", "=", body.id)
      .executeTakeFirstOrThrow();
    expect(event.action).toBe("run.planned");
    expect(String(event.canonical)).not.toContain("door seal");
  });

  it("names everything that blocks it, with its place, and plans nothing", async () => {
    const before = await countPlans();
    const devices = [
      ...devicesFrom(0, 2),
      { serial: "NOBODY-1", position: "P3" },
      { serial: golden.serials[3], position: "P1" },
      { serial: golden.serials[0], position: "P5" },
    ];
    const points = [point(1, 20, { loadsKg: [20.5] }), point(1, 22)];
    const { status, body } = await plan(planOf("Bad", { devices, points }));
    expect([status, body.code, body.errorCount]).toEqual([422, "run_plan.invalid", 6]);
    expect(body.errors.map(({ path, code }: Reply) => [path, code])).toEqual([
      ["/devices/2", "plan.serial_unknown"],
      ["/devices/3", "plan.position_twice"],
      ["/devices/4", "plan.serial_twice"],
      ["/points/1", "plan.load_above_capacity"],
      ["/points/1", "plan.point_twice"],
      ["/points", "plan.temperatures_too_few"],
    ]);
    expect(await countPlans()).toBe(before);
  });

  it.each([
    [409, "run_plan.exists", {}],
    [422, "request.invalid", { devices: [{ serial: "MW20-2609-00001", position: "=1+1" }] }],
    [422, "request.invalid", { points: [] }],
    [422, "request.invalid", { devices: [] }],
    [422, "request.invalid", { points: [point(1, 20, { loadsKg: [-1] })] }],
    [422, "run.equipment_unknown", { name: "X", equipment: ["NONE"] }],
    [404, "draw.not_found", { name: "X", sampleDraw: "01890000-0000-7000-8000-000000000000" }],
  ])("answers %i %s", async (status, code, more) => {
    const before = await countPlans();
    const reply = await plan(planOf("Sample 1", more));
    expect([reply.status, reply.body.code, await countPlans()], JSON.stringify(reply.body)).toEqual([
      status,
      code,
      before,
    ]);
  });

  it("is an engineer's, in a lot that is there", async () => {
    const before = await countPlans();
    expect((await plan(planOf("Y"), null)).status).toBe(401);
    expect((await plan(planOf("Y"), "reviewer")).body.code).toBe("auth.forbidden");
    expect((await plan(planOf("Y"), "engineer", "NONE")).status).toBe(404);
    expect((await plan(planOf("Y"), "engineer", other.lot)).body.errors[0].code).toBe("plan.serial_unknown");
    expect(await countPlans()).toBe(before);
  });

  it("gives a name to one of two who plan at the same moment", async () => {
    const replies = await Promise.all([plan(planOf("Same")), plan(planOf("Same"), "engineer2")]);
    expect(replies.map((one) => one.status).sort()).toEqual([201, 409]);
  });

  it("takes devices from a draw of the lot, and leaves planned devices out of the next draw", async () => {
    const drawn = await api.call("POST", `/lots/${golden.lot}/sample-draws`, { as: "engineer", body: { count: 5 } });
    const devices = drawn.body.serials.map((serial: string, index: number) => ({ serial, position: `P${index}` }));
    const { body } = await plan(planOf("Drawn", { devices, sampleDraw: drawn.body.id }));
    expect(body.sampleDraw).toEqual({ id: drawn.body.id, seed: drawn.body.seed, count: 5 });
    const next = await api.call("POST", `/lots/${golden.lot}/sample-draws`, { as: "engineer", body: { count: 5 } });
    for (const serial of next.body.serials) expect(drawn.body.serials).not.toContain(serial);
    expect(next.body.leftOut.map((one: Reply) => one.reason)).toEqual(["planned"]);
  });
});

describe("checking a plan that is being written", () => {
  it("says the same as planning would, stores nothing, and takes what is not there yet", async () => {
    const before = await countPlans();
    const check = (body: object, as: PersonName = "engineer") =>
      api.call("POST", `/lots/${golden.lot}/run-plans/check`, { as, body });
    const { name: _, ...draft } = planOf("", { devices: [{ serial: "NOBODY-1", position: "" }], points: [] });
    const { status, body } = await check(draft);
    expect([status, codes(body), body.rows]).toEqual([
      200,
      ["plan.serial_unknown", "plan.position_invalid", "plan.sample_small", "plan.no_points"],
      0,
    ]);
    expect((await check({ ...draft, equipment: ["NONE"] })).body.code).toBe("run.equipment_unknown");
    expect((await check({ purpose: "sample" })).status).toBe(422);
    expect((await check(draft, "reviewer")).status).toBe(403);
    expect(await countPlans()).toBe(before);
  });
});

describe("the template", () => {
  it("has the columns of the contract under their names, rows in working order, measured ones empty", async () => {
    const points = [point(1, 10, { repeats: 2 }), point(2, 40, { loadsKg: [10, 20] })];
    const { body } = await plan(planOf("Template", { devices: devicesFrom(0, 2), points }));
    const { reply, rows } = await templateOf(body.id);
    expect(reply.headers.get("content-type")).toContain("text/csv");
    expect(reply.headers.get("content-disposition")).toBe(`attachment; filename="${golden.lot}-Template.csv"`);
    for (const name of Object.keys(rows[0] as object)) expect(ALL_COLUMNS).toContain(name);
    const [first, second] = devicesFrom(0, 2).map((device) => device.serial);
    const key = (row: Record<string, string>) => [row.point, row.serial, row.position, row.load_kg];
    expect(rows.map(key)).toEqual([
      ...["0", "20", "0", "20"].map((load) => ["1", first, "P1", load]),
      ...["0", "20", "0", "20"].map((load) => ["1", second, "P2", load]),
      ...["0", "10", "20"].map((load) => ["2", first, "P1", load]),
      ...["0", "10", "20"].map((load) => ["2", second, "P2", load]),
    ]);
    for (const row of rows) expect([row.chamber_c, row.signal_mv_v, row.taken_at]).toEqual(["", "", ""]);
    expect(await templateOf("01890000-0000-7000-8000-000000000000").catch((error) => error)).toBeDefined();
  });

  it("is refused as readings while it is empty, cell by cell", async () => {
    const [row] = (await api.call("GET", `/lots/${golden.lot}/run-plans`, { as: "auditor" })).body.items;
    const csv = (await api.call("GET", `/run-plans/${row.id}/template`, { as: "auditor" })).body;
    const reply = await upload(csv, { plan: row.id });
    expect([reply.status, reply.body.code]).toEqual([422, "run.invalid"]);
    expect(reply.body.errors[0]).toMatchObject({ row: 2, column: "chamber_c" });
    expect((await get(row.id)).state).toBe("planned");
  });
});

describe("readings of a planned run", () => {
  let id: string;
  let run: string;

  it("take the plan, which is used then", async () => {
    id = (await plan(planOf("Measured", { devices: devicesFrom(10, 5) }))).body.id;
    const reply = await upload(await readingsOf(id, () => ({})), { plan: id });
    expect(reply.status, JSON.stringify(reply.body)).toBe(201);
    run = reply.body.id;
    expect(reply.body.plan).toEqual({ id, name: "Measured" });
    expect(codes(reply.body).filter((code: string) => code.startsWith("plan."))).toEqual([]);
    expect(await get(id)).toMatchObject({ state: "used", findings: [], runs: [{ id: run, supersededBy: null }] });
  });

  it("come once: a second run needs to replace the first, and then keeps the plan", async () => {
    const shifted = await readingsOf(id, (row) => ({ chamber_c: `${Number(row.chamber_c) + 0.2}` }));
    const again = await upload(shifted, { plan: id });
    expect([again.status, again.body.code]).toEqual([409, "run_plan.wrong_state"]);
    const late = await upload(shifted, { plan: id, supersedes: run, reason: "sensor correction forgotten" });
    expect(late.status, JSON.stringify(late.body)).toBe(201);
    expect((await get(id)).runs).toMatchObject([{ id: run, supersededBy: late.body.id }, { supersededBy: null }]);
  });

  it("say what differs from the plan", async () => {
    const planned = (await plan(planOf("Differs", { devices: devicesFrom(15, 5), equipment: ["TS-01", "CH-02"] })))
      .body;
    const [first, second, third] = devicesFrom(15, 5).map((device) => device.serial);
    const extra = golden.serials[25] as string;
    const text = await readingsOf(planned.id, (row) => {
      if (row.serial === first && row.point === "3") return null;
      if (row.serial === second) return { position: "P3" };
      if (row.serial === third && row.point === "1" && row.load_kg === "20") return { load_kg: "10" };
      return {};
    });
    const added = `${text}\n${extra},1,P9,0,-10,245,1820,0.001,2026-11-02T09:00:00Z,30,`;
    const reply = await upload(added, { plan: planned.id });
    expect(reply.status, JSON.stringify(reply.body)).toBe(201);
    const about = reply.body.findings.filter((one: Reply) => one.code.startsWith("plan."));
    expect(about.map(({ code, severity, serial, point: at }: Reply) => [code, severity, serial, at])).toEqual([
      ["plan.reading_missing", "soft", first, 3],
      ["plan.position_differs", "soft", second, null],
      ["plan.load_differs", "note", third, 1],
      ["plan.reading_unplanned", "note", extra, 1],
      ["plan.equipment_differs", "note", null, null],
    ]);
  });

  it.each([
    ["run_plan.other_purpose", 422, { purpose: "verification" }],
    ["run_plan.not_found", 404, { plan: "01890000-0000-7000-8000-000000000000" }],
    ["request.invalid", 422, { plan: "Measured" }],
  ])("are refused with %s, %i", async (code, status, more) => {
    const open = (await plan(planOf(`For ${code}`))).body.id;
    const before = (await api.db.selectFrom("run").select("id").execute()).length;
    const reply = await upload(await readingsOf(open, () => ({})), { plan: open, ...more });
    expect([reply.status, reply.body.code]).toEqual([status, code]);
    expect((await get(open)).state).toBe("planned");
    expect((await api.db.selectFrom("run").select("id").execute()).length).toBe(before);
  });

  it("are refused for a plan of another lot", async () => {
    const open = (await plan(planOf("Elsewhere"))).body.id;
    const reply = await upload(await readingsOf(open, () => ({})), { plan: open }, other.lot);
    expect([reply.status, reply.body.code]).toEqual([422, "run_plan.other_lot"]);
  });

  it("take a plan once where two come at the same moment", async () => {
    const open = (await plan(planOf("Race", { devices: devicesFrom(20, 5) }))).body.id;
    const texts = [
      await readingsOf(open, () => ({})),
      await readingsOf(open, (row) => ({ soak_min: `${row.soak_min}.5` })),
    ];
    const replies = await Promise.all(texts.map((text) => upload(text, { plan: open })));
    expect(replies.map((one) => one.status).sort()).toEqual([201, 409]);
    expect((await get(open)).runs).toHaveLength(1);
  });
});

describe("dropping a plan", () => {
  it("keeps it with the reason, and once", async () => {
    const { id } = (await plan(planOf("Dropped"))).body;
    const { status, body } = await drop(id);
    expect([status, body.state]).toEqual([200, "dropped"]);
    expect(body.dropped).toMatchObject({ reason: "chamber broken", by: "engineer" });
    expect([(await drop(id)).status, (await drop(id)).body.code]).toEqual([409, "run_plan.wrong_state"]);
    const reply = await upload(await readingsOf(id, () => ({})), { plan: id });
    expect([reply.status, reply.body.code]).toEqual([409, "run_plan.wrong_state"]);
  });

  it("needs a reason, an engineer, and a plan that is there and not used", async () => {
    const { id } = (await plan(planOf("Kept"))).body;
    expect((await drop(id, " ")).status).toBe(422);
    expect((await drop(id, "why", "reviewer")).status).toBe(403);
    expect((await drop("01890000-0000-7000-8000-000000000000")).status).toBe(404);
    expect((await get(id)).state).toBe("planned");
    const used = (await api.call("GET", `/lots/${golden.lot}/run-plans`, { as: "auditor", query: { state: "used" } }))
      .body;
    expect((await drop(used.items[0].id)).body.code).toBe("run_plan.wrong_state");
  });

  it("leaves it in the list, which pages and filters", async () => {
    const list = (query: Record<string, string | number>) =>
      api.call("GET", `/lots/${golden.lot}/run-plans`, { as: "service", query });
    const dropped = (await list({ state: "dropped" })).body.items;
    expect(dropped.map((one: Reply) => one.name)).toEqual(["Dropped"]);
    const first = (await list({ limit: 2 })).body;
    expect(first.items).toHaveLength(2);
    expect((await list({ limit: 2, cursor: first.next })).body.items[0].id < first.items[1].id).toBe(true);
    expect((await api.call("GET", "/lots/NONE/run-plans", { as: "service" })).status).toBe(404);
    expect((await api.call("GET", `/lots/${golden.lot}/run-plans`, { as: "operator" })).status).toBe(403);
  });
});

it("stands on the engineers' day until it is read or dropped", async () => {
  const { id } = (await plan(planOf("On the day"))).body;
  const shown = async (as: PersonName) =>
    (await api.call("GET", "/today", { as })).body.planned.filter((one: Reply) => one.link.endsWith(id));
  expect(await shown("engineer2")).toMatchObject([
    { kind: "run-plan", title: "On the day", detail: `${golden.lot} · sample run · 5 devices`, who: "engineer" },
  ]);
  expect(await shown("auditor")).toEqual([]);
  await drop(id);
  expect(await shown("engineer2")).toEqual([]);
});
