import { createHash } from "node:crypto";
import { beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { approveDerivation, deriveGolden, uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import type { GoldenLot } from "../support/scenario/golden";

// biome-ignore lint/suspicious/noExplicitAny: replies are looked at member by member; the routes check them themselves.
type Reply = any;

let api: TestApi;
let people: ScenarioPeople;
let golden: GoldenLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  golden = await arrangeFamilyLot(people);
});

const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at";
const csv = { "content-type": "text/csv" };

const upload = (
  body: string | Uint8Array<ArrayBuffer> | Buffer,
  query: Record<string, string | boolean> = {},
  as: PersonName | null = "engineer",
) =>
  api.call("POST", `/lots/${golden.lot}/runs`, {
    ...(as && { as }),
    body,
    headers: csv,
    query: { purpose: "sample", ...query },
  });

const countRuns = async () => (await api.db.selectFrom("run").select("id").execute()).length;

/** A small valid run; `shift` makes its bytes differ. */
const small = (shift = 0, serial = "MW20-2609-00001", day = "2026-03-02") =>
  `${HEADER}\n${[10, 40].flatMap((chamber, point) => [0, 12].map((load, row) => `${serial},${point + 1},${chamber}.0${shift},98,${1900 + chamber * 8},${load},${(load * 0.1 + row * 1e-6).toFixed(7)},${day}T0${point + 8}:4${row}:00Z`)).join("\n")}\n`;

describe("uploading a run", () => {
  it("stores all of it, the bytes as they came, and says what the rules find", async () => {
    const bytes = golden.read("readings-sample.csv");
    const reply = await upload(bytes, { fileName: "March.csv" });
    expect(reply.status, JSON.stringify(reply.body)).toBe(201);
    expect(reply.body).toMatchObject({
      id: expect.any(String),
      sha256: createHash("sha256").update(bytes).digest("hex"),
      rows: 80,
      devices: 10,
      purpose: "sample",
      fileName: "March.csv",
      added: 0,
      staleSets: 0,
    });
    expect(reply.body.findings).toContainEqual(
      expect.objectContaining({ code: "equipment.none_named", severity: "note" }),
    );
    const file = await api.call("GET", `/runs/${reply.body.id}/file`, { as: "auditor" });
    expect(Buffer.from(file.body).equals(bytes)).toBe(true);
    const first = await api.call("GET", `/runs/${reply.body.id}/readings`, { as: "auditor", query: { limit: 50 } });
    expect(first.body.items).toHaveLength(50);
    expect(first.body.items[0]).toMatchObject({
      row: 2,
      serial: "MW20-2609-00001",
      chamberC: 10.057,
      signalMvV: -0.0139659,
      takenAt: "2026-03-02T09:48:00.000Z",
    });
    const rest = await api.call("GET", `/runs/${reply.body.id}/readings`, {
      as: "auditor",
      query: { limit: 50, cursor: first.body.next },
    });
    expect(rest.body).toMatchObject({ next: null, items: { length: 30 } });
    const listed = await api.call("GET", `/lots/${golden.lot}/runs`, { as: "service" });
    expect(listed.body.items.map((one: Reply) => one.id)).toContain(reply.body.id);
    const event = await api.db
      .selectFrom("ledgerEvent")
      .select("action")
      .where("subject", "=", reply.body.id)
      .executeTakeFirst();
    expect(event?.action).toBe("run.uploaded");
  });

  it("refuses the same bytes again, also under another purpose", async () => {
    const before = await countRuns();
    const reply = await upload(golden.read("readings-sample.csv"), { purpose: "verification" });
    expect([reply.status, reply.body.code, await countRuns()]).toEqual([409, "run.duplicate", before]);
  });

  it("takes one of two uploads of the same bytes at the same moment", async () => {
    const text = small(7);
    const replies = await Promise.all([upload(text), upload(text)]);
    expect(replies.map((one) => one.status).sort()).toEqual([201, 409]);
  });

  it("names every bad row with row, column, code and message, and stores nothing", async () => {
    const before = await countRuns();
    const lines = [
      HEADER,
      "MW20-2609-00001,1,10,98,1900,0,0.1,2026-03-02T09:48:00Z",
      "MW20-2609-00001,1,NaN,98,1900,12,1.1,2026-03-02T09:49:00Z",
      "MW20-2609-00002,1,10,98,1900,12,1.1,2026-03-02T09:50:00Z",
      "NOBODY-1,1,10,98,1900,0,0.1,2026-03-02T09:51:00Z",
      "MW20-2609-00003,1,10,98,1900,0,1e999,2026-03-02T09:52:00Z",
      "MW20-2609-00003,1,10,98,1900,12,1.1,2026-03-02T09:53:00Z",
    ];
    const reply = await upload(lines.join("\n"));
    expect([reply.status, reply.body.code, reply.body.errorCount]).toEqual([422, "run.invalid", 4]);
    expect(reply.body.errors).toEqual([
      { row: 3, column: "chamber_c", code: "reading.not_a_number", message: expect.any(String) },
      { row: 4, column: "load_kg", code: "reading.loaded_without_unloaded", message: expect.any(String) },
      { row: 5, column: "serial", code: "device.unknown", message: expect.any(String) },
      { row: 6, column: "signal_mv_v", code: "reading.not_a_number", message: expect.any(String) },
    ]);
    expect(await countRuns()).toBe(before);
  });

  it.each([
    ["nothing at all", ""],
    ["a header only", `${HEADER}\n`],
    ["Latin-1", Buffer.concat([Buffer.from(`${HEADER}\n`), Buffer.from([0xe9])])],
    ["100,000 columns", `${"serial,".repeat(100_000)}\n`],
    ["a quotation mark never closed", `${HEADER}\n"${small().slice(90)}`],
    ["a formula in a cell", small().replace("98,", "=cmd|x,")],
    ["a NUL byte", small().replace("MW20", "MW\u000020")],
    ["a loaded row in a zero run", small(), { purpose: "zero" }],
    ["a proof run without output", small(), { purpose: "proof" }],
  ])("refuses %s in clear words and stores nothing", async (_, body, query: Record<string, string> = {}) => {
    const before = await countRuns();
    const reply = await upload(body, query);
    expect([reply.status, reply.body.code]).toEqual([422, "run.invalid"]);
    expect(reply.body.errors[0]).toEqual({
      row: expect.any(Number),
      column: expect.any(String),
      code: expect.stringMatching(/^[a-z0-9_.]+$/),
      message: expect.any(String),
    });
    expect(await countRuns()).toBe(before);
  });

  it("adds unknown devices only when asked to, and never takes another lot's", async () => {
    await api.call("POST", "/lots", { as: "engineer", body: { code: "OTHER", family: "MW-20", firmware: "2.3.0" } });
    await api.call("POST", "/lots/OTHER/devices", { as: "engineer", body: { serials: ["OTHER-1"] } });
    const other = await upload(small(1, "OTHER-1"), { addDevices: true });
    expect(other.body.errors).toContainEqual(
      expect.objectContaining({ row: 2, column: "serial", code: "device.in_other_lot" }),
    );
    const added = await upload(small(1, "new-1"), { addDevices: true });
    expect([added.status, added.body.added]).toEqual([201, 1]);
    const device = await api.db.selectFrom("device").select("serial").where("serial", "=", "NEW-1").execute();
    expect(device).toHaveLength(1);
  });

  it("keeps the equipment as it stands and finds an overdue certificate", async () => {
    const equipment = {
      code: "TS-01",
      kind: "sensor",
      certificate: "K-1",
      calibratedUntil: "2026-03-01",
      uncertainty: 0.05,
      coverageFactor: 2.1,
    };
    expect((await api.call("POST", "/equipment", { as: "engineer", body: equipment })).status).toBe(201);
    const unknown = await upload(small(2), { equipment: "TS-01,TS-99" });
    expect([unknown.status, unknown.body.code, unknown.body.codes]).toEqual([422, "run.equipment_unknown", ["TS-99"]]);
    const reply = await upload(small(2), { equipment: "ts-01" });
    expect(reply.body.equipment).toEqual([{ ...equipment, positions: [] }]);
    expect(reply.body.findings).toContainEqual(
      expect.objectContaining({ code: "equipment.overdue", severity: "soft" }),
    );
    const onTime = await upload(small(3, "MW20-2609-00001", "2026-03-01"), { equipment: "TS-01" });
    expect(onTime.body.findings.map((one: Reply) => one.code)).not.toContain("equipment.overdue");
  });

  it("asks for role, session, type, purpose and reason", async () => {
    expect((await upload(small(4), {}, "reviewer")).status).toBe(403);
    expect((await upload(small(4), {}, null)).status).toBe(401);
    expect((await upload(small(4), { purpose: "other" })).status).toBe(422);
    expect((await upload(small(4), { supersedes: "0192f3a0-0000-7000-8000-000000000000" })).body.code).toBe(
      "request.invalid",
    );
    expect((await upload(small(4), { supersedes: "0192f3a0-0000-7000-8000-000000000000", reason: "x" })).status).toBe(
      404,
    );
    expect(
      (
        await api.call("POST", "/lots/NONE/runs", {
          as: "engineer",
          body: small(4),
          headers: csv,
          query: { purpose: "sample" },
        })
      ).status,
    ).toBe(404);
    expect(
      (await api.call("POST", `/lots/${golden.lot}/runs`, { as: "engineer", body: {}, query: { purpose: "sample" } }))
        .status,
    ).toBe(415);
    const large = await api.call("POST", `/lots/${golden.lot}/runs`, {
      as: "engineer",
      body: "x",
      headers: { ...csv, "content-length": "67108865" },
      query: { purpose: "sample" },
    });
    expect([large.status, large.body.detail]).toEqual([413, expect.stringContaining("67,108,864")]);
    expect((await api.call("GET", "/runs/0192f3a0-0000-7000-8000-000000000000", { as: "auditor" })).status).toBe(404);
  });

  it("makes what rests on a superseded run stale, once, for a reason, within lot and purpose", async () => {
    const lot: GoldenLot = { ...golden, read: (file) => Buffer.concat([golden.read(file), Buffer.from("\n")]) };
    const read = await uploadGoldenRuns(people, lot);
    const derived = await deriveGolden(people, read);
    await approveDerivation(people, derived.derivation);
    const replaced = { supersedes: read.runs.span, reason: "Load was not centred" };
    const wrong = await upload(Buffer.concat([golden.read("readings-span.csv"), Buffer.from("\n\n")]), replaced);
    expect([wrong.status, wrong.body.code]).toEqual([422, "run.supersedes_other_purpose"]);
    const reply = await upload(Buffer.concat([golden.read("readings-span.csv"), Buffer.from("\n\n")]), {
      ...replaced,
      purpose: "span",
    });
    expect(reply.status, JSON.stringify(reply.body)).toBe(201);
    expect(reply.body.staleSets).toBe(28);
    const { body } = await api.call("GET", `/derivations/${derived.derivation}`, { as: "auditor" });
    expect(body.counts.states).toEqual({ stale: 28 });
    const again = await upload(Buffer.concat([golden.read("readings-span.csv"), Buffer.from("\n\n\n")]), {
      ...replaced,
      purpose: "span",
    });
    expect([again.status, again.body.code]).toEqual([409, "run.already_superseded"]);
    const old = await api.call("POST", `/lots/${golden.lot}/derivations`, {
      as: "engineer",
      body: { method: "pooled-gain", order: 1, runs: Object.values(read.runs) },
    });
    expect([old.status, old.body.code]).toEqual([422, "derivation.run_superseded"]);
  });

  it("finds two runs of one purpose with the same serial", async () => {
    const { body } = await api.call("GET", `/lots/${golden.lot}/runs`, { as: "engineer" });
    const samples = body.items
      .filter((one: Reply) => one.purpose === "sample" && one.devices === 10)
      .map((one: Reply) => one.id);
    expect(samples.length).toBe(2);
    const reply = await api.call("POST", `/lots/${golden.lot}/derivations`, {
      as: "engineer",
      body: { method: "individual", order: 1, runs: samples },
    });
    expect([reply.status, reply.body.code, reply.body.serial]).toEqual([422, "run.serial_repeated", "MW20-2609-00001"]);
  });

  it("takes 20 MB whole", async () => {
    const lines = [HEADER];
    for (let device = 0; lines.length < 240_000; device++) {
      const serial = `BIG-${String(device).padStart(6, "0")}`;
      for (const point of [1, 2]) {
        for (const load of [0, 12, 0, 12]) {
          lines.push(
            `${serial},${point},${point * 20}.0${device % 10},${98 + (lines.length % 20)},${1900 + point * 100}.${device % 97},${load},${(load * 0.1 + device * 1e-7 + lines.length * 1e-9).toFixed(7)},2026-03-02T09:48:00Z`,
          );
        }
      }
    }
    const text = `${lines.join("\n")}\n`;
    const reply = await upload(text, { addDevices: true });
    expect(reply.status, JSON.stringify(reply.body).slice(0, 500)).toBe(201);
    expect(reply.body).toMatchObject({ rows: lines.length - 1, bytes: text.length });
  }, 120_000);
});
