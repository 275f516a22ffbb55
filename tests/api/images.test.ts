import { createHash } from "node:crypto";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { readSRecords } from "@/builders/codec/files/s-record-read";
import { startBuild } from "@/lib/services/packages/start-build";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import { type BuiltPackage, buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let first: DerivedLot;
let second: DerivedLot;
let built: BuiltPackage;
let builtSecond: BuiltPackage;

const FIRST = "MW20-2609-00001";
const sha256 = (bytes: string | Buffer) => createHash("sha256").update(bytes).digest("hex");

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  first = await arrangeDerived(people);
  built = await buildGolden(people, first);
  second = await arrangeSecondDerived(people);
  builtSecond = await buildGolden(people, second);
});

describe("GET /packages/{id}/images", () => {
  it("lists images by serial, page by page", async () => {
    const serials: string[] = [];
    let cursor: string | null = null;
    do {
      const query: Record<string, string | number> = { limit: 10, ...(cursor === null ? {} : { cursor }) };
      const { status, body } = await api.call("GET", `/packages/${built.id}/images`, { as: "auditor", query });
      expect(status).toBe(200);
      expect(body.items.length).toBeLessThanOrEqual(10);
      serials.push(...body.items.map((item: { serial: string }) => item.serial));
      cursor = body.next;
    } while (cursor !== null);
    expect(serials).toEqual(first.serials);
  });

  it("tells length, digests and where the coefficients come from, and decodes only when asked", async () => {
    const plain = (await api.call("GET", `/packages/${built.id}/images`, { as: "service", query: { limit: 1 } })).body
      .items[0];
    expect(plain).toMatchObject({ serial: FIRST, length: 128, hardwareId: null, derivation: first.derivation });
    expect(plain.sha256).toBe(JSON.parse(first.read("images/sha256-of-bytes.json").toString())[FIRST]);
    expect(plain.hexSha256).toBe(sha256(first.read(`images/${FIRST}.hex`)));
    expect(plain.fields).toBeUndefined();
    const query = { limit: 1, values: true };
    const decoded = (await api.call("GET", `/packages/${built.id}/images`, { as: "service", query })).body.items[0];
    expect(decoded.fields.find((field: { name: string }) => field.name === "serial").value).toBe(FIRST);
  });

  it("finds serials by a part of them, in any case", async () => {
    const found = await api.call("GET", `/packages/${built.id}/images`, {
      as: "engineer",
      query: { search: "mw20-2609-0001" },
    });
    expect(found.body.items.length).toBeGreaterThan(1);
    for (const { serial } of found.body.items) expect(serial).toContain("MW20-2609-0001");
    const none = await api.call("GET", `/packages/${built.id}/images`, { as: "engineer", query: { search: "%" } });
    expect(none.body).toEqual({ items: [], next: null });
  });

  it("refuses strangers, operators, what is not there and what is not built", async () => {
    const path = `/packages/${built.id}/images`;
    expect((await api.call("GET", path)).status).toBe(401);
    expect(await api.call("GET", path, { as: "operator" })).toMatchObject({
      status: 403,
      body: { code: "auth.forbidden" },
    });
    const missing = await api.call("GET", `/packages/${uuidv7()}/images`, { as: "engineer" });
    expect(missing).toMatchObject({ status: 404, body: { code: "package.not_found" } });
    expect((await api.call("GET", path, { as: "engineer", query: { limit: 1001 } })).status).toBe(422);
    expect((await api.call("GET", "/packages/x/images", { as: "engineer" })).status).toBe(422);
    const started = await startBuild(api.ctx("engineer"), { lot: first.lot, layout: first.layoutVersion });
    const building = await api.call("GET", `/packages/${started.id}/images`, { as: "engineer" });
    expect(building).toMatchObject({ status: 409, body: { code: "package.not_built" } });
    const one = await api.call("GET", `/packages/${started.id}/images/${FIRST}`, { as: "engineer" });
    expect(one).toMatchObject({ status: 409, body: { code: "package.not_built" } });
  });
});

describe("GET /packages/{id}/images/{serial}", () => {
  const get = (serial: string, accept?: string, headers: Record<string, string> = {}) =>
    api.call("GET", `/packages/${built.id}/images/${serial}`, {
      as: "engineer",
      headers: { ...(accept === undefined ? {} : { accept }), ...headers },
    });

  it("decodes every field and checksum with its place, raw bytes, value and unit", async () => {
    const { status, body } = await get(FIRST);
    expect(status).toBe(200);
    expect(body).toMatchObject({ package: built.id, lot: first.lot, version: "1.0.0", layout: "1.0.0", serial: FIRST });
    expect(body).toMatchObject({ length: 128, fill: 255, pageBytes: 16, baseAddress: 0, kept: [] });
    expect(sha256(Buffer.from(body.bytes, "hex"))).toBe(body.sha256);
    const layout = JSON.parse(first.layout);
    const names = [...layout.fields, ...layout.checksums].map((part: { name: string }) => part.name);
    expect(body.fields.map((field: { name: string }) => field.name)).toEqual(names);
    for (const field of body.fields) {
      expect(field.raw).toBe(body.bytes.slice(field.at * 2, (field.at + field.length) * 2));
    }
    expect(body.checksums.every((sum: { ok: boolean }) => sum.ok)).toBe(true);
  });

  it("maps the whole memory: extents and gaps cover every byte once", async () => {
    const view = (await api.call("GET", `/packages/${builtSecond.id}/images/MW300-2610-00001`, { as: "reviewer" }))
      .body;
    const covered = new Uint8Array(view.length);
    for (const { at, length } of view.extents)
      for (let i = at; i < at + length; i++) covered[i] = (covered[i] as number) + 1;
    for (const [from, to] of view.gaps) for (let i = from; i <= to; i++) covered[i] = (covered[i] as number) + 1;
    expect([...covered].every((count) => count === 1)).toBe(true);
    expect(view.extents.some((extent: { kind: string }) => extent.kind === "kept")).toBe(true);
    expect(view.kept.length).toBeGreaterThan(0);
  });

  it("answers the golden Intel HEX byte by byte where it is asked for", async () => {
    const { status, headers, body } = await get(FIRST, "text/x-intel-hex");
    expect(status).toBe(200);
    expect(body).toBe(first.read(`images/${FIRST}.hex`).toString());
    expect(headers.get("content-type")).toBe("text/x-intel-hex");
    expect(headers.get("content-disposition")).toBe(`attachment; filename="${FIRST}-1.0.0.hex"`);
    expect(headers.get("vary")).toBe("accept");
    expect(headers.get("etag")).toBe(`"${sha256(body)}"`);
  });

  it("answers S-records with the same bytes, by their own digest", async () => {
    const { status, headers, body } = await get(FIRST, "text/x-motorola-srecord");
    expect(status).toBe(200);
    expect(headers.get("content-type")).toBe("text/x-motorola-srecord");
    expect(headers.get("content-disposition")).toBe(`attachment; filename="${FIRST}-1.0.0.srec"`);
    expect(headers.get("etag")).toBe(`"${sha256(body)}"`);
    const { segments } = readSRecords(body);
    expect(segments).toEqual(readIntelHex(first.read(`images/${FIRST}.hex`).toString()).segments);
  });

  it("leaves what the device keeps out of S-records as out of the HEX", async () => {
    const path = `/packages/${builtSecond.id}/images/MW300-2610-00001`;
    const [hex, records] = await Promise.all(
      ["text/x-intel-hex", "text/x-motorola-srecord"].map((accept) =>
        api.call("GET", path, { as: "service", headers: { accept } }),
      ),
    );
    const read = readSRecords(records?.body);
    expect(read.gaps.length).toBeGreaterThan(0);
    expect(read.segments).toEqual(readIntelHex(hex?.body).segments);
  });

  it("answers the bytes as they lie in memory, in ranges too", async () => {
    const whole = await get(FIRST, "application/octet-stream");
    expect(whole.body).toHaveLength(128);
    expect(sha256(whole.body)).toBe(JSON.parse(first.read("images/sha256-of-bytes.json").toString())[FIRST]);
    const part = await get(FIRST, "application/octet-stream", { range: "bytes=2-17" });
    expect(part.status).toBe(206);
    expect(part.body.equals(whole.body.subarray(2, 18))).toBe(true);
  });

  it("weighs what Accept says, and refuses what is not offered", async () => {
    const weighed = await get(FIRST, "application/json;q=0.2, text/x-intel-hex;q=0.9");
    expect(weighed.headers.get("content-type")).toBe("text/x-intel-hex");
    expect((await get(FIRST, "*/*")).headers.get("content-type")).toContain("application/json");
    expect(await get(FIRST, "image/png")).toMatchObject({ status: 406, body: { code: "request.not_acceptable" } });
  });

  it("takes serials in lower case and names what is missing", async () => {
    expect((await get(FIRST.toLowerCase())).body.serial).toBe(FIRST);
    expect(await get("MW20-2609-99999")).toMatchObject({ status: 404, body: { code: "image.not_found" } });
    expect(await get("MW300-2610-00001")).toMatchObject({ status: 404, body: { code: "image.not_found" } });
    expect((await get("-")).status).toBe(422);
  });

  it("lets a person's key read it and a stranger's not", async () => {
    const key = await insertAccessKey(api.owner, api.people.service.id);
    const path = `/packages/${built.id}/images/${FIRST}`;
    expect((await api.call("GET", path, { as: { bearer: key } })).status).toBe(200);
    expect((await api.call("GET", path, { as: { bearer: `${key}x` } })).status).toBe(401);
    expect((await api.call("GET", path, { as: "operator" })).status).toBe(403);
  });
});
