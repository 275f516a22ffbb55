import { beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";

// biome-ignore lint/suspicious/noExplicitAny: replies are looked at member by member; the routes check them themselves.
type Reply = any;

let api: TestApi;
let derived: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  const people: ScenarioPeople = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
});

const HEADER = "serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc";
const ROW = "MW20-2609-00001,-231.9,0.1246,-0.0139,6.9e-06,0.996,-0.00041";
const base = { referenceC: 20, capacityKg: 20 };

const importCsv = (
  body: string,
  query: Record<string, string | number> = base,
  as: "engineer" | "reviewer" = "engineer",
) =>
  api.call("POST", `/lots/${derived.lot}/coefficients`, { as, body, query, headers: { "content-type": "text/csv" } });

const newest = async (query: Record<string, string | number> = {}): Promise<Reply> =>
  (await api.call("GET", `/lots/${derived.lot}/coefficients`, { as: "service", query })).body;

const count = async () => (await api.db.selectFrom("derivation").select("id").execute()).length;

describe("the newest coefficients of a lot", () => {
  it("lists each device once, by serial, in pages, with state and derivation", async () => {
    const first = await newest({ limit: 20 });
    expect(first.items).toHaveLength(20);
    expect(first.items[0]).toMatchObject({
      serial: "MW20-2609-00001",
      state: "approved",
      role: "sample",
      derivation: derived.derivation,
      coefficients: { gain: expect.closeTo(0.996092629750764, 12) },
    });
    const second = await newest({ limit: 20, cursor: first.next });
    expect([second.items.length, second.next]).toEqual([8, null]);
  });

  it("gives all of them as CSV where that is asked for, in full precision", async () => {
    const reply = await api.call("GET", `/lots/${derived.lot}/coefficients`, {
      as: "auditor",
      headers: { accept: "text/csv" },
    });
    expect(reply.headers.get("content-type")).toBe("text/csv; charset=utf-8");
    const lines = reply.body.trim().split("\n");
    expect(lines).toHaveLength(29);
    const { items } = await newest();
    const cells = lines[1].split(",");
    expect([cells[0], Number(cells[1]), Number(cells[5]), cells[9]]).toEqual([
      items[0].serial,
      items[0].coefficients.tempOffset,
      items[0].coefficients.gain,
      "approved",
    ]);
  });

  it("offers nothing else, and nothing to operators and strangers", async () => {
    const path = `/lots/${derived.lot}/coefficients`;
    expect((await api.call("GET", path, { as: "auditor", headers: { accept: "image/png" } })).status).toBe(406);
    expect((await api.call("GET", path, { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", path)).status).toBe(401);
    expect((await api.call("GET", "/lots/NONE/coefficients", { as: "auditor" })).status).toBe(404);
  });
});

describe("importing coefficients", () => {
  it("makes a derivation that a second person decides, and becomes the newest set", async () => {
    const reply = await importCsv(`${HEADER}\n${ROW}\n`);
    expect(reply.status, JSON.stringify(reply.body)).toBe(201);
    expect(reply.body).toMatchObject({ method: "import", state: "proposed", order: 1, provenRange: null });
    expect(reply.body.makers).toMatchObject([{ act: "imported", name: "engineer" }]);
    const { items } = await newest();
    expect(items[0]).toMatchObject({
      method: "import",
      role: "imported",
      state: "proposed",
      coefficients: { gain: 0.996 },
    });
    const path = `/derivations/${reply.body.id}/decisions`;
    const approved = await api.call("POST", path, {
      as: "reviewer",
      body: { decision: "approve", password: PASSWORD },
    });
    expect(approved.body).toMatchObject({ state: "approved", counts: { states: { approved: 1 } } });
    const other = await importCsv(`${HEADER}\n${ROW.replace("0.996", "0.997")}\n`);
    expect(other.body.sha256).not.toBe(reply.body.sha256);
  });

  it("takes order 2 with both further columns", async () => {
    const reply = await importCsv(`${HEADER},zeroTc2,gainTc2\n${ROW},1e-8,-8e-8\n`);
    expect([reply.status, reply.body.order]).toEqual([201, 2]);
    expect((await newest()).items[0].coefficients).toMatchObject({ zeroTc2: 1e-8, gainTc2: -8e-8 });
  });

  it("asks for an acknowledgement of a gain far from 1", async () => {
    const reply = await importCsv(`${HEADER}\n${ROW.replace("0.996", "1.5")}\n`);
    const decision = { decision: "approve", password: PASSWORD };
    const path = `/derivations/${reply.body.id}/decisions`;
    const refused = await api.call("POST", path, { as: "reviewer", body: decision });
    expect([refused.status, refused.body.code, refused.body.findings[0].code]).toEqual([
      409,
      "derivation.not_acknowledged",
      "gain.far_from_nominal",
    ]);
  });

  it("tells values that hold the cell's effect in the place of its correction, and asks for an acknowledgement", async () => {
    const reply = await importCsv(`${HEADER}\n${ROW.replace("-0.00041", "0.00041")}\n`);
    const found = reply.body.findings.filter((one: Reply) => one.severity === "soft");
    expect(found.map((one: Reply) => [one.code, one.data.coefficient, one.data.compared])).toContainEqual([
      "import.sign_opposite",
      "gainTc",
      1,
    ]);
    expect(reply.body).toMatchObject({ envelope: null, uncertainty: null, counts: { findings: { hard: 0 } } });
    expect(reply.body.counts.findings.soft).toBe(found.length);
  });

  it.each([
    ["another reference", { referenceC: 23, capacityKg: 20 }, 409, "coefficients.reference_differs"],
    ["another capacity", { referenceC: 20, capacityKg: 30 }, 409, "coefficients.reference_differs"],
    ["no reference", { capacityKg: 20 }, 422, "request.invalid"],
  ])("refuses %s", async (_, query, status, code) => {
    const before = await count();
    const reply = await importCsv(`${HEADER}\n${ROW}\n`, query as Record<string, number>);
    expect([reply.status, reply.body.code, await count()]).toEqual([status, code, before]);
  });

  it.each([
    ["an unknown serial", `${HEADER}\n${ROW.replace("00001", "99999")}`, "2 serial device.unknown"],
    ["a serial twice", `${HEADER}\n${ROW}\n${ROW}`, "3 serial coefficients.serial_repeated"],
    ["NaN", `${HEADER}\n${ROW.replace("0.996", "NaN")}`, "2 gain reading.not_a_number"],
    ["a gain of 0", `${HEADER}\n${ROW.replace("0.996", "0")}`, "2 gain coefficients.gain_not_positive"],
    ["one column of order 2", `${HEADER},zeroTc2\n${ROW},1`, "1 gainTc2 column.missing"],
    ["a column too many", `${HEADER},colour\n${ROW},red`, "1 colour column.unknown"],
    ["a short row", `${HEADER}\nMW20-2609-00001,1`, "2  row.cells_wrong"],
    ["an open quotation mark", `${HEADER}\n"${ROW}`, "2  file.quotes_wrong"],
    ["nothing", "", "1  file.empty"],
  ])("refuses %s with its row, and stores nothing", async (_, body, expected) => {
    const before = await count();
    const reply = await importCsv(body);
    expect([reply.status, reply.body.code, await count()]).toEqual([422, "coefficients.invalid", before]);
    expect(reply.body.errors.map((one: Reply) => `${one.row} ${one.column} ${one.code}`)).toContain(expected);
  });

  it("is the engineer's", async () => {
    expect((await importCsv(`${HEADER}\n${ROW}\n`, base, "reviewer")).status).toBe(403);
  });
});
