import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { sealOf } from "@/lib/domain/seal";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { approveDerivation, type DerivedLot, deriveGolden, type ReadLot } from "../support/scenario/derived";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, type BuiltPackage } from "../support/scenario/packaged";
import { arrangeStation, reportOf, sendWrites, type TestStation } from "../support/scenario/station";

let api: TestApi;
let people: ScenarioPeople;
let derived: DerivedLot;
let individual: string;
let released: BuiltPackage;
let station: TestStation;

const LOT = "MW20-2609";
const serial = (n: number) => `${LOT}-${String(n).padStart(5, "0")}`;
const serials = (from: number, to: number) => Array.from({ length: to - from + 1 }, (_, i) => serial(from + i));
const NOBODY = "00000000-0000-7000-8000-000000000000";

/** The sample run by sensor RTD-1, the others by RTD-2. */
async function uploadWithSensors(): Promise<ReadLot> {
  for (const code of ["RTD-1", "RTD-2", "RTD-3"]) {
    const body = { code, kind: "sensor", certificate: `C-${code}`, calibratedUntil: "2030-01-01", uncertainty: 0.05 };
    expect((await api.call("POST", "/equipment", { as: "engineer", body })).status).toBe(201);
  }
  const golden = await arrangeFamilyLot(people);
  const runs = {} as ReadLot["runs"];
  for (const purpose of ["sample", "zero", "span", "verification"] as const) {
    const equipment = [purpose === "sample" ? "RTD-1" : "RTD-2"];
    const bytes = golden.read(`readings-${purpose}.csv`);
    runs[purpose] = (await uploadRun(people.engineer, { lot: LOT, purpose, equipment, addDevices: false, bytes })).id;
  }
  return { ...golden, runs };
}

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const read = await uploadWithSensors();
  const own = await api.call("POST", `/lots/${LOT}/derivations`, {
    as: "engineer",
    body: { method: "individual", order: 1, runs: [read.runs.sample], exclude: [] },
  });
  individual = own.body.id;
  await api.runJobs();
  derived = await deriveGolden(people, read);
  await approveDerivation(people, derived.derivation);
  released = await arrangeReleased(people, derived);
  station = await arrangeStation(api, "Line 1");
  await sendWrites(api, station, [
    await reportOf(api, { package: released.id, serial: serial(1) }),
    await reportOf(api, { package: released.id, serial: serial(12) }),
    await reportOf(api, { package: released.id, serial: serial(13) }, { readbackSha256: "f".repeat(64) }),
  ]);
}, 60_000);
afterAll(() => api.close());

const impact = (query: Record<string, string | number>) => api.call("GET", "/trace/impact", { as: "auditor", query });
const reached = async (query: Record<string, string | number>): Promise<string[]> =>
  (await impact({ limit: 1_000, ...query })).body.items.map((item: { serial: string }) => item.serial);
const itemOf = async (query: Record<string, string>, n: number) =>
  (await impact({ limit: 1_000, ...query })).body.items.find((item: { serial: string }) => item.serial === serial(n));

describe("GET /trace/impact", () => {
  it("a sample run reaches every device of the pooled gain, with the state each is in now", async () => {
    const run = derived.runs.sample;
    expect(await reached({ run })).toEqual(serials(1, 28));
    expect(await itemOf({ run }, 12)).toEqual({
      serial: serial(12),
      lot: LOT,
      coefficients: "approved",
      role: "zero",
      packages: ["1.0.0"],
      carries: "1.0.0",
      outcome: "verified",
      carriesReached: true,
      held: false,
      shipped: false,
    });
    expect(await itemOf({ run }, 13)).toMatchObject({ carries: null, outcome: "mismatch", carriesReached: false });
    expect(await itemOf({ run }, 14)).toMatchObject({ carries: null, outcome: null, carriesReached: false });
  });

  it("any other run reaches the devices that it measured", async () => {
    expect(await reached({ run: derived.runs.zero })).toEqual(serials(11, 24));
    expect(await reached({ run: derived.runs.span })).toEqual(serials(11, 24));
    expect(await reached({ run: derived.runs.verification })).toEqual(serials(25, 28));
  });

  it("goes by derivation, layout and package", async () => {
    expect(await reached({ derivation: individual })).toEqual(serials(1, 10));
    expect((await itemOf({ derivation: individual }, 1)).packages).toEqual([]);
    expect(await reached({ derivation: derived.derivation })).toEqual(serials(1, 28));
    expect(await reached({ package: released.id })).toEqual(serials(1, 28));
    const { body } = await api.call("GET", "/families/MW-20/layouts/1.0.0", { as: "auditor" });
    expect(await reached({ layout: body.id })).toEqual(serials(1, 28));
  });

  it("goes by equipment, in the time in which readings were taken with it", async () => {
    expect(await reached({ equipment: "rtd-1" })).toEqual(serials(1, 28));
    expect(await reached({ equipment: "RTD-2" })).toEqual(serials(11, 28));
    expect(await reached({ equipment: "RTD-3" })).toEqual([]);
    expect(await reached({ equipment: "RTD-1", from: "2026-03-02T00:00:00Z", to: "2026-03-03T00:00:00Z" })).toEqual(
      serials(1, 28),
    );
    expect(await reached({ equipment: "RTD-1", to: "2026-03-01T00:00:00Z" })).toEqual([]);
    expect(await reached({ equipment: "RTD-1", from: "2027-01-01T00:00:00Z" })).toEqual([]);
  });

  it("knows that a replaced board carries nothing that was reached", async () => {
    const body = { kind: "board-replaced", reason: "no answer", hardwareId: "B-2" };
    await api.call("POST", `/devices/${serial(1)}/events`, { as: "engineer", body });
    expect(await itemOf({ run: derived.runs.sample }, 1)).toMatchObject({ carries: null, carriesReached: false });
  });

  it("is paged by serial", async () => {
    const first = (await impact({ package: released.id, limit: 20 })).body;
    expect(first.items).toHaveLength(20);
    const rest = (await impact({ package: released.id, limit: 20, cursor: first.next })).body;
    expect([rest.items.length, rest.next]).toEqual([8, null]);
  });

  it("asks for exactly one thing that is there", async () => {
    for (const query of [{}, { run: derived.runs.zero, package: released.id }] as Record<string, string>[])
      expect((await impact(query)).body).toMatchObject({ code: "trace.source_missing", status: 422 });
    for (const noun of ["run", "derivation", "layout", "package"]) {
      const { status, body } = await impact({ [noun]: NOBODY });
      expect([status, body.code]).toEqual([404, `${noun}.not_found`]);
      expect((await impact({ [noun]: "x" })).status).toBe(422);
    }
    expect((await impact({ equipment: "NONE" })).body.code).toBe("equipment.not_found");
    expect((await impact({ equipment: "RTD-1", from: "yesterday" })).status).toBe(422);
  });

  it("is for readers", async () => {
    const query = { package: released.id };
    expect((await api.call("GET", "/trace/impact", { query })).status).toBe(401);
    expect((await api.call("GET", "/trace/impact", { as: "operator", query })).status).toBe(403);
    expect((await api.call("GET", "/trace/impact", { as: { bearer: station.key }, query })).status).toBe(403);
    expect((await api.call("GET", "/trace/impact", { as: "service", query })).status).toBe(200);
  });
});

describe("GET /search", () => {
  const find = async (q: string, as: "auditor" | "operator" = "auditor") =>
    (await api.call("GET", "/search", { as, query: { q } })).body.items;
  const digest = async () =>
    (await api.call("GET", `/packages/${released.id}`, { as: "auditor" })).body.digest as string;

  it("finds a serial, a lot and a family by the very code first", async () => {
    expect((await find(` ${serial(7).toLowerCase()} `))[0]).toEqual({
      kind: "device",
      title: serial(7),
      detail: `MW-20 · ${LOT}`,
      link: `/trace/${serial(7)}`,
      exact: true,
    });
    expect((await find(LOT))[0]).toMatchObject({ kind: "lot", title: LOT, link: `/lots/${LOT}`, exact: true });
    expect((await find("mw-20"))[0]).toMatchObject({ kind: "family", title: "MW-20", exact: true });
    const part = await find("00002");
    expect(part[0]).toMatchObject({ kind: "device", title: serial(2), exact: false });
  });

  it("finds a package by version, lot and version, digest and seal", async () => {
    const { words } = sealOf(await digest());
    for (const q of [
      "1.0.0",
      `${LOT} 1.0.0`,
      `${LOT}@1.0.0`,
      (await digest()).slice(0, 12),
      await digest(),
      words.join(" "),
      words.slice(0, 2).join(" "),
    ])
      expect(await find(q)).toContainEqual({
        kind: "package",
        title: `${LOT} 1.0.0`,
        detail: "live",
        link: `/packages/${released.id}`,
        exact: true,
      });
    expect(await find(`${LOT} 9.9.9`)).toEqual([]);
  });

  it("treats signs of patterns as text", async () => {
    for (const q of ["%", "_", "\\", "'", "MW20%"]) expect(await find(q)).toEqual([]);
  });

  it("gives operators serials and released packages only", async () => {
    expect((await find(LOT, "operator")).map((item: { kind: string }) => item.kind)).not.toContain("lot");
    expect(await find("1.0.0", "operator")).toMatchObject([{ kind: "package" }]);
  });

  it("answers 401, 403 and 422", async () => {
    expect((await api.call("GET", "/search", { query: { q: "x" } })).status).toBe(401);
    expect((await api.call("GET", "/search", { as: { bearer: station.key }, query: { q: "x" } })).status).toBe(403);
    for (const q of ["", "x".repeat(81), "a\0b"])
      expect((await api.call("GET", "/search", { as: "auditor", query: { q } })).status).toBe(422);
  });
});
