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

describe("GET /compare/serials", () => {
  const serials = (query: Record<string, string | number> = {}, as: "reviewer" | "operator" = "reviewer") =>
    api.call("GET", "/compare/serials", { as, query: { from: first.id, to: second.id, ...query } });
  const named = async (query: Record<string, string | number>) =>
    ((await serials(query)).body.items as Device[]).map((device) => device.serial);

  it("answers the same devices as the pages do, wherever a part begins", async () => {
    const whole = (await compare(first.id, second.id)).body.items as Device[];
    const { body } = await serials();
    expect(body).toMatchObject({ total: 28, offset: 0 });
    expect(body.items).toEqual(whole);
    const part = (await serials({ offset: 26, limit: 10 })).body;
    expect(part).toMatchObject({ total: 28, offset: 26 });
    expect(part.items).toEqual(whole.slice(26));
    expect((await serials({ offset: 99 })).body).toMatchObject({ total: 28, items: [] });
  });

  it("gives the first ones before all are counted", async () => {
    const query = { from: second.id, to: other.id, limit: 3 };
    const { body } = await api.call("GET", "/compare/serials", { as: "auditor", query });
    expect(body.total).toBeNull();
    expect(body.items.map((device: Device) => device.serial)).toEqual([
      "MW20-2609-00001",
      "MW20-2609-00002",
      "MW20-2609-00003",
    ]);
    const counted = await api.call("GET", "/compare/serials", { as: "auditor", query: { ...query, sort: "-serial" } });
    expect(counted.body.total).toBe(41);
  });

  it("puts the largest step first and filters by field and step", async () => {
    expect((await named({ sort: "-largest", limit: 2 })).sort()).toEqual(CHANGED);
    expect(await named({ sort: "-largest", offset: 27 })).toEqual([HELD]);
    expect(await named({ field: "gainTc" })).toEqual(CHANGED);
    expect(await named({ field: "gainTc", least: STEPS })).toEqual(CHANGED);
    expect(await named({ field: "gainTc", least: STEPS + 1 })).toEqual([]);
    expect(await named({ change: "removed" })).toEqual([HELD]);
    expect(await named({ search: "-00005" })).toEqual([HELD]);
  });

  it("refuses strangers, operators and nonsense", async () => {
    expect((await serials({}, "operator")).status).toBe(403);
    expect((await serials({ limit: 501 })).status).toBe(422);
    expect((await serials({ change: "moved" })).status).toBe(422);
    const query = { from: first.id, to: second.id };
    expect((await api.call("GET", "/compare/serials", { query })).status).toBe(401);
    const unknown = { from: first.id, to: uuidv7() };
    expect((await api.call("GET", "/compare/serials", { query: unknown, as: "auditor" })).status).toBe(404);
  });
});

describe("GET /compare/overview", () => {
  it("tells how each field's difference is distributed, and which are parameters", async () => {
    const query = { from: first.id, to: second.id };
    const { body } = await api.call("GET", "/compare/overview", { as: "auditor", query });
    expect(body.counts).toEqual({ added: 0, removed: 1, values: 2, "version-only": 25, same: 0 });
    const parameters = body.fields.filter((field: { parameter: boolean }) => field.parameter);
    expect(parameters).toEqual([
      {
        name: "gainTc",
        unit: "1/K",
        devices: 2,
        stepsMin: STEPS,
        stepsMax: STEPS,
        parameter: true,
        histogram: { in: "steps", from: STEPS - 0.5, width: 1, counts: [2] },
      },
    ]);
    expect((await api.call("GET", "/compare/overview", { as: "operator", query })).status).toBe(403);
    expect((await api.call("GET", "/compare/overview", { query })).status).toBe(401);
  });
});

describe("GET /compare/export", () => {
  const exported = (query: Record<string, string | number>) =>
    api.call("GET", "/compare/export", { as: "auditor", query: { from: first.id, to: second.id, ...query } });

  it("writes a line of CSV for each field that differs, at full precision", async () => {
    const { headers, body } = await exported({ format: "csv", change: "values" });
    expect(headers.get("content-disposition")).toBe('attachment; filename="MW20-2609-1.0.0-to-1.1.0.csv"');
    const lines = body.trim().split("\n");
    expect(lines[0]).toBe("serial,change,field,unit,from,to,steps,bytes_changed");
    const items = (await compare(first.id, second.id, { change: "values" })).body.items as Device[];
    const expected = items.flatMap((device) =>
      device.fields.map(({ name, unit, from, to, steps }) =>
        [device.serial, "values", name, unit ?? "", from, to, steps ?? "", device.bytes.length].join(","),
      ),
    );
    expect(lines.slice(1)).toEqual(expected);
  });

  it("writes JSON with the overview before the serials", async () => {
    const { headers, body } = await exported({ format: "json", sort: "-largest" });
    expect(headers.get("content-type")).toBe("application/json");
    const whole = typeof body === "string" ? JSON.parse(body) : body;
    expect(whole.items).toHaveLength(28);
    expect(whole.items.at(-1)).toMatchObject({ serial: HELD, change: "removed" });
    expect(whole.counts.values).toBe(2);
  });

  it("refuses strangers, operators and other formats", async () => {
    const query = { from: first.id, to: second.id, format: "csv" };
    expect((await api.call("GET", "/compare/export", { query })).status).toBe(401);
    expect((await api.call("GET", "/compare/export", { query, as: "operator" })).status).toBe(403);
    expect((await exported({ format: "xls" })).status).toBe(422);
  });
});

describe("POST /compare/file", () => {
  const serial = "MW20-2609-00001";
  const file = (body: string | Uint8Array<ArrayBuffer>, type: string, as: "service" | "auditor" = "service") =>
    api.call("POST", "/compare/file", {
      as,
      query: { package: first.id, serial },
      body,
      headers: { "content-type": type },
    });
  const image = async () => (await api.call("GET", `/packages/${first.id}/images/${serial}`, { as: "auditor" })).body;
  const hexOf = async () =>
    (
      await api.call("GET", `/packages/${first.id}/images/${serial}`, {
        as: "auditor",
        headers: { accept: "text/x-intel-hex" },
      })
    ).body as string;

  it("finds the image's own HEX equal, and its raw bytes", async () => {
    const { status, body } = await file(await hexOf(), "text/x-intel-hex");
    expect(status).toBe(200);
    expect(body).toMatchObject({ change: "same", fields: [], bytes: [], image: { serial } });
    const raw = Buffer.from((await image()).bytes, "hex");
    expect((await file(new Uint8Array(raw), "application/octet-stream")).body.change).toBe("same");
  });

  it("names the field, the bytes and the checksum of one flipped bit", async () => {
    const { bytes, fields } = await image();
    const raw = Buffer.from(bytes, "hex");
    const { at } = fields.find((field: { name: string }) => field.name === "zero");
    raw[at] = (raw[at] as number) ^ 1;
    const { body } = await file(new Uint8Array(raw), "application/octet-stream");
    expect(body.change).toBe("values");
    expect(body.fields.map((field: { name: string }) => field.name)).toEqual(["zero"]);
    expect(body.bytes).toEqual([{ at, from: (raw[at] as number) ^ 1, to: raw[at] }]);
    expect(body.file.checksums).toEqual([{ name: "imageCrc", ok: false }]);
  });

  it("says why a file can't be read", async () => {
    const bad = (await hexOf()).replace(/..\n/, "00\n");
    expect((await file(bad, "text/x-intel-hex")).body.code).toBe("hex.bad_checksum");
    expect((await file(new Uint8Array(5), "application/octet-stream")).body.code).toBe("dump.wrong_length");
    expect((await file("S9030000FC\n", "text/plain")).body.code).toBe("dump.incomplete");
    expect((await file(await hexOf(), "text/x-intel-hex", "auditor")).status).toBe(403);
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
