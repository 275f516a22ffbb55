import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { importCoefficients } from "@/lib/services/coefficients/import-coefficients";
import { listLotCoefficients } from "@/lib/services/coefficients/list-coefficients";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { approveDerivation, arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import { publishLayout, type ScenarioPeople } from "../support/scenario/family-lot";
import { type BuiltPackage, buildGolden } from "../support/scenario/packaged";

/** 1044 stored steps of the golden layout's gainTc, whose scale is read from it below. */
const STEPS = 1044;
const CHANGED = ["MW20-2609-00003", "MW20-2609-00007"];
const HELD = "MW20-2609-00005";

let api: TestApi;
let people: ScenarioPeople;
let lot: DerivedLot;
let other: BuiltPackage;
let first: BuiltPackage;
let second: BuiltPackage;

interface Device {
  serial: string;
  change: string;
  fields: { name: string; from: unknown; to: unknown; unit: string | null; steps: number | null }[];
  bytes: { at: number; from: number | null; to: number | null }[];
}

const compare = (from: string, to: string, query: Record<string, string | number> = {}) =>
  api.call("GET", "/compare", { as: "reviewer", query: { from, to, ...query } });

/** Imports coefficients of two devices, gainTc moved by whole stored steps, and approves them. */
async function moveGainTc(): Promise<void> {
  const scale = JSON.parse(lot.layout).fields.find((field: { name: string }) => field.name === "gainTc")
    .scale as number;
  const { items } = await listLotCoefficients(people.engineer, lot.lot, { limit: 100 });
  const rows = items
    .filter((item) => CHANGED.includes(item.serial))
    .map(({ serial, coefficients: c }) =>
      [serial, c?.tempOffset, c?.tempSlope, c?.zero, c?.zeroTc, c?.gain, (c?.gainTc ?? 0) + STEPS * scale].join(","),
    );
  const csv = `serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc\n${rows.join("\n")}\n`;
  const { referenceC, capacityKg } = lot.family;
  const { id } = await importCoefficients(people.engineer, {
    lot: lot.lot,
    referenceC,
    capacityKg,
    bytes: Buffer.from(csv),
  });
  await approveDerivation(people, id);
}

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = await arrangeDerived(people);
  first = await buildGolden(people, lot);
  await moveGainTc();
  await api.call("POST", `/devices/${HELD}/events`, {
    as: "service",
    body: { kind: "hold", reason: "Dropped", password: PASSWORD },
  });
  second = await buildGolden(people, lot);
  other = await buildGolden(people, await arrangeSecondDerived(people));
});

describe("GET /compare", () => {
  it("tells serials with other values by field, unit and stored steps, and by byte", async () => {
    const { status, body } = await compare(first.id, second.id, { change: "values" });
    expect(status).toBe(200);
    expect(body.items.map((device: Device) => device.serial)).toEqual(CHANGED);
    for (const device of body.items as Device[]) {
      const gainTc = device.fields.find((field) => field.name === "gainTc");
      expect(gainTc).toMatchObject({ unit: "1/K", steps: STEPS });
      const [before, after] = [gainTc?.from as number, gainTc?.to as number];
      expect(after - before).toBeCloseTo(STEPS * 1e-12, 15);
      expect(device.bytes.length).toBeGreaterThan(0);
      expect(device.bytes.every((byte) => byte.from !== byte.to)).toBe(true);
    }
  });

  it("calls version-only what differs in nothing but version numbers and checksums", async () => {
    const { body } = await compare(first.id, second.id, { change: "version-only" });
    expect(body.items).toHaveLength(25);
    const layout = JSON.parse(lot.layout);
    const allowed = new Set([
      ...layout.fields
        .filter((field: { value: { from?: string } }) => /^(package|layout)\./.test(field.value.from ?? ""))
        .map((field: { name: string }) => field.name),
      ...layout.checksums.map((sum: { name: string }) => sum.name),
    ]);
    for (const device of body.items as Device[]) {
      expect(device.fields.length).toBeGreaterThan(0);
      for (const { name } of device.fields) expect(allowed).toContain(name);
    }
  });

  it("counts over all serials whatever the page shows", async () => {
    const counts = { added: 0, removed: 1, values: 2, "version-only": 25, same: 0 };
    expect((await compare(first.id, second.id, { limit: 1 })).body.counts).toEqual(counts);
    expect((await compare(first.id, second.id, { change: "added" })).body).toMatchObject({
      counts,
      items: [],
      next: null,
    });
    const { fields } = (await compare(first.id, second.id)).body;
    expect(fields).toContainEqual({ name: "gainTc", unit: "1/K", devices: 2, stepsMin: STEPS, stepsMax: STEPS });
  });

  it("names the one that is gone, and the other way round the one that is new", async () => {
    const removed = (await compare(first.id, second.id, { change: "removed" })).body.items as Device[];
    expect(removed.map((device) => device.serial)).toEqual([HELD]);
    expect(removed[0]?.bytes).toEqual([]);
    expect(removed[0]?.fields.find((field) => field.name === "serial")).toMatchObject({
      from: HELD,
      to: null,
      steps: null,
    });
    const added = (await compare(second.id, first.id, { change: "added" })).body.items as Device[];
    expect(added[0]).toMatchObject({ serial: HELD, change: "added" });
  });

  it("gives the same serials page by page as at once", async () => {
    const whole = (await compare(first.id, second.id)).body.items as Device[];
    const paged: Device[] = [];
    let cursor: string | null = null;
    do {
      const { body } = await compare(first.id, second.id, { limit: 5, ...(cursor === null ? {} : { cursor }) });
      paged.push(...body.items);
      cursor = body.next;
    } while (cursor !== null);
    expect(paged).toEqual(whole);
    expect(whole).toHaveLength(28);
  });

  it("lists nothing of a package beside itself, but counts it", async () => {
    const { body } = await compare(first.id, first.id);
    expect(body).toMatchObject({ items: [], next: null, fields: [], counts: { same: 28, values: 0 } });
  });

  it("takes packages of two lots and layouts", async () => {
    const { body } = await compare(first.id, other.id, { limit: 1000 });
    expect(body.from).toMatchObject({ lot: "MW20-2609", family: "MW-20", layout: "1.0.0" });
    expect(body.to).toMatchObject({ lot: "MW300-2610", family: "MW-300", layout: "2.1.3" });
    expect(body.counts).toEqual({ added: 14, removed: 28, values: 0, "version-only": 0, same: 0 });
    const serials = (body.items as Device[]).map((device) => device.serial);
    expect(serials).toEqual([...serials].sort());
  });

  it("finds serials by a part of them", async () => {
    const { body } = await compare(first.id, second.id, { search: "-0000" });
    expect((body.items as Device[]).map((device) => device.serial)).toHaveLength(9);
  });

  it("refuses strangers, operators, ids that are none and packages that are not there or not built", async () => {
    const query = { from: first.id, to: second.id };
    expect((await api.call("GET", "/compare", { query })).status).toBe(401);
    expect((await api.call("GET", "/compare", { query, as: "operator" })).status).toBe(403);
    expect((await api.call("GET", "/compare", { query: { from: first.id }, as: "auditor" })).status).toBe(422);
    expect((await compare(first.id, "1.0.0")).status).toBe(422);
    expect((await compare(first.id, uuidv7())).body.code).toBe("package.not_found");
    const started = await api.call("POST", `/lots/${lot.lot}/packages`, { as: "engineer", body: { layout: "1.0.0" } });
    const building = await compare(first.id, started.body.id);
    expect(building).toMatchObject({ status: 409, body: { code: "package.not_built" } });
  });
});

describe("GET /compare/images", () => {
  it("shows two images side by side and what differs", async () => {
    const [serial] = CHANGED;
    const query = { from: first.id, to: second.id, serial: serial as string };
    const { status, body } = await api.call("GET", "/compare/images", { as: "service", query });
    expect(status).toBe(200);
    expect(body.change).toBe("values");
    expect(body.from).toMatchObject({ package: first.id, serial });
    expect(body.to).toMatchObject({ package: second.id, serial });
    for (const { at, from, to } of body.bytes) {
      expect(Number.parseInt(body.from.bytes.slice(at * 2, at * 2 + 2), 16)).toBe(from);
      expect(Number.parseInt(body.to.bytes.slice(at * 2, at * 2 + 2), 16)).toBe(to);
    }
  });

  it("compares two serials, and names one that is missing", async () => {
    const query = { from: first.id, to: first.id, serial: "MW20-2609-00001", toSerial: "MW20-2609-00002" };
    const { body } = await api.call("GET", "/compare/images", { as: "service", query });
    expect(body.fields.map((field: { name: string }) => field.name)).toContain("serial");
    const gone = await api.call("GET", "/compare/images", {
      as: "service",
      query: { from: first.id, to: second.id, serial: HELD },
    });
    expect(gone).toMatchObject({ status: 404, body: { code: "image.not_found", serial: HELD } });
    expect((await api.call("GET", "/compare/images", { as: "operator", query })).status).toBe(403);
    expect((await api.call("GET", "/compare/images", { query })).status).toBe(401);
  });
});

describe("GET /compare/layouts", () => {
  const layouts = (query: Record<string, string>) => api.call("GET", "/compare/layouts", { as: "auditor", query });

  it("names each change with the step that it asks for", async () => {
    const next = JSON.parse(lot.layout);
    next.version = "2.0.0";
    next.fields.find((field: { name: string }) => field.name === "gainTc").scale *= 2;
    await publishLayout(people, JSON.stringify(next));
    const { status, body } = await layouts({ family: "mw-20", from: "1.0.0", to: "2.0.0" });
    expect(status).toBe(200);
    expect(body).toMatchObject({ family: "MW-20", from: "1.0.0", to: "2.0.0", step: "major" });
    expect(body.changes).toHaveLength(1);
    expect(body.changes[0].message).toBe(
      "the scale of “gainTc” is 2e-12 instead of 1e-12: firmware that reads 1.x would misread it",
    );
  });

  it("refuses what is not there", async () => {
    expect((await layouts({ family: "NONE", from: "1.0.0", to: "2.0.0" })).body.code).toBe("family.not_found");
    expect((await layouts({ family: "MW-20", from: "1.0.0", to: "9.0.0" })).body.code).toBe("layout.not_found");
    const query = { family: "MW-20", from: "1.0.0", to: "2.0.0" };
    expect((await api.call("GET", "/compare/layouts", { query })).status).toBe(401);
    expect((await api.call("GET", "/compare/layouts", { query, as: "operator" })).status).toBe(403);
    expect((await layouts({ family: "MW-20", from: "1", to: "2.0.0" })).status).toBe(422);
  });
});
