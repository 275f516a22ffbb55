import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, type BuiltPackage } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let derived: DerivedLot;
let first: BuiltPackage;
let kept: BuiltPackage;

const serial = (n: number) => `MW20-2609-${String(n).padStart(5, "0")}`;
const keptSerial = (n: number) => `MW300-2610-${String(n).padStart(5, "0")}`;
const HEX = "text/x-intel-hex";
const RAW = "application/octet-stream";

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
  first = await arrangeReleased(people, derived);
  kept = await arrangeReleased(people, await arrangeSecondDerived(people));
}, 60_000);
afterAll(() => api.close());

const image = async (pkg: BuiltPackage, of: string): Promise<Uint8Array<ArrayBuffer>> => {
  const accept = { accept: RAW };
  const { status, body } = await api.call("GET", `/packages/${pkg.id}/images/${of}`, {
    as: "auditor",
    headers: accept,
  });
  expect(status).toBe(200);
  return Uint8Array.from(body as Buffer);
};
const hexOf = async (pkg: BuiltPackage, of: string): Promise<string> => {
  const reply = await api.call("GET", `/packages/${pkg.id}/images/${of}`, { as: "auditor", headers: { accept: HEX } });
  return Buffer.from(reply.body).toString("latin1");
};
const check = (body: string | Uint8Array<ArrayBuffer>, of: string | null, type?: string, as: PersonName = "service") =>
  api.call("POST", of === null ? "/dumps" : `/devices/${of}/dump`, {
    as,
    body,
    headers: { "content-type": type ?? (typeof body === "string" ? HEX : RAW) },
  });
/** A data record of Intel HEX. */
const record = (address: number, bytes: number[], type = 0): string => {
  const all = [bytes.length, address >> 8, address & 0xff, type, ...bytes];
  const sum = -all.reduce((total, byte) => total + byte, 0) & 0xff;
  return `:${[...all, sum].map((byte) => byte.toString(16).toUpperCase().padStart(2, "0")).join("")}\n`;
};
const END = record(0, [], 1);
const hexAt = (segments: [number, number[]][]): string =>
  segments.map(([at, bytes]) => record(at, bytes)).join("") + END;

describe("a dump that is exactly an image", () => {
  it("is recognised with and without the serial, as HEX and as raw bytes", async () => {
    const [bytes, hex] = [await image(first, serial(1)), await hexOf(first, serial(1))];
    for (const body of [bytes, hex])
      for (const of of [serial(1), serial(1).toLowerCase(), null]) {
        const reply = await check(body, of);
        expect(reply.status).toBe(200);
        expect(reply.body).toEqual({
          match: "exact",
          serial: serial(1),
          package: first.id,
          version: "1.0.0",
          live: true,
          checksums: [{ name: "imageCrc", ok: true }],
          differences: [],
          advice: "Exactly the image of 1.0.0, which is live. Nothing to do.",
        });
      }
    expect((await check(hex, serial(1), "text/plain; charset=utf-8")).body.match).toBe("exact");
    expect((await check(hex.replaceAll("\n", "\r\n").toLowerCase(), serial(1))).body.match).toBe("exact");
  });

  it("may hold more than the memory, in any order of records", async () => {
    const bytes = [...(await image(first, serial(2)))];
    const records = Array.from({ length: 8 }, (_, i): [number, number[]] => [16 * i, bytes.slice(16 * i, 16 * i + 16)]);
    const more = hexAt([...records.toReversed(), [0x8000, [1, 2, 3]]]);
    expect((await check(more, serial(2))).body).toMatchObject({ match: "exact", serial: serial(2) });
  });

  it("is of the release before, and says that it is not live", async () => {
    const old = await image(first, serial(3));
    const newer = await arrangeReleased(people, derived, { step: "patch" });
    const { body } = await check(old, serial(3));
    expect(body).toMatchObject({ match: "exact", version: "1.0.0", live: false });
    expect(body.advice).toContain("not live");
    expect((await check(await image(newer, serial(3)), null)).body).toMatchObject({
      match: "exact",
      version: "1.0.1",
      live: true,
    });
  });
});

describe("a dump that differs", () => {
  it("names byte, field, expected and actual values, and a broken checksum", async () => {
    const bytes = await image(first, serial(4));
    bytes[48] = (bytes[48] as number) ^ 1;
    const { body } = await check(bytes, serial(4));
    expect(body).toMatchObject({
      match: "differs",
      serial: serial(4),
      package: first.id,
      version: "1.0.0",
      checksums: [{ name: "imageCrc", ok: false }],
    });
    expect(body.differences).toHaveLength(1);
    const [difference] = body.differences;
    expect(difference).toMatchObject({ at: 48, field: "zero" });
    expect(Number.parseInt(difference.expected, 16) ^ Number.parseInt(difference.actual, 16)).toBe(1);
    expect(Math.abs(difference.expectedValue - difference.actualValue)).toBeCloseTo(1e-6, 12);
    expect(body.advice).toContain("checksum");
  });

  it("is found by the serial in it", async () => {
    const bytes = await image(first, serial(5));
    bytes[100] = 0;
    expect((await check(bytes, null)).body).toMatchObject({
      match: "differs",
      serial: serial(5),
      differences: [{ at: 100, field: null, expected: "ff", actual: "00", expectedValue: null, actualValue: null }],
    });
  });

  it("is compared with the release it is nearest to", async () => {
    const bytes = await image(first, serial(6));
    bytes[100] = 0;
    const { body } = await check(bytes, serial(6));
    expect(body).toMatchObject({ match: "differs", version: "1.0.0", live: false });
    expect(body.differences).toHaveLength(1);
  });

  it("of another serial is told as such, with the caution that boards may be swapped", async () => {
    const { body } = await check(await image(first, serial(8)), serial(7));
    expect(body).toMatchObject({ match: "other-serial", serial: serial(8), checksums: [{ ok: true }] });
    expect(body.differences.map((one: { field: string }) => one.field)).toContain("serial");
    expect(body.differences.find((one: { field: string }) => one.field === "serial")).toMatchObject({
      expectedValue: serial(7),
      actualValue: serial(8),
    });
    expect(body.advice).toContain("swapped");
  });

  it("an erased memory differs in everything, and belongs to nobody", async () => {
    const blank = new Uint8Array(128).fill(255);
    expect((await check(blank, serial(1))).body).toMatchObject({ match: "differs", checksums: [{ ok: false }] });
    expect((await check(blank, null)).body).toMatchObject({
      match: "unknown",
      serial: null,
      package: null,
      differences: [],
    });
  });

  it("a device in no package has nothing to be compared with", async () => {
    await api.call("POST", "/lots/MW20-2609/devices", { as: "engineer", body: { serials: ["NEW-1"] } });
    expect((await check(await image(first, serial(1)), "NEW-1")).body).toMatchObject({
      match: "unknown",
      serial: "NEW-1",
    });
  });
});

describe("a memory with ranges that belong to the device", () => {
  it("matches whatever stands there, as HEX without them and as raw bytes with them", async () => {
    const hex = await hexOf(kept, keptSerial(1));
    expect((await check(hex, keptSerial(1))).body).toMatchObject({ match: "exact", serial: keptSerial(1) });
    expect((await check(hex, null)).body).toMatchObject({ match: "exact", serial: keptSerial(1) });
    const bytes = await image(kept, keptSerial(1));
    for (let at = 40; at <= 51; at++) bytes[at] = at;
    bytes[95] = 0x5a;
    expect((await check(bytes, keptSerial(1))).body).toMatchObject({ match: "exact" });
    bytes[24] = (bytes[24] as number) ^ 0x80;
    const { body } = await check(bytes, keptSerial(1));
    expect(body).toMatchObject({
      match: "differs",
      checksums: [{ name: "head", ok: false }, { ok: true }, { ok: true }],
    });
    expect(body.differences).toMatchObject([{ at: 24, field: "capacity" }]);
  });
});

describe("a file that can't be read", () => {
  const good = hexAt([[0, [1, 2, 3]]]);
  it.each([
    ["hex.bad_checksum", 2, `${record(0, [1])}:0100010002FE\n${END}`],
    ["hex.not_a_record", 1, "no hex at all\n"],
    [
      "hex.overlap",
      2,
      hexAt([
        [0, [1, 2, 3]],
        [2, [9]],
      ]),
    ],
    ["hex.no_end", 1, record(0, [1])],
    ["hex.after_end", 3, good + record(9, [1])],
    ["hex.unknown_type", 1, record(0, [1], 9) + END],
    ["hex.wrong_length", 1, `:10000000FF\n${END}`],
    ["hex.segment_wrap", 2, record(0, [0xf0, 0], 2) + record(0xffff, [1, 2]) + END],
    ["hex.address_out_of_range", 2, record(0, [0xff, 0xff], 4) + record(0xffff, [1, 2]) + END],
  ] as [string, number, string][])("is refused with %s and its line", async (code, line, text) => {
    for (const of of [serial(1), null]) {
      const { status, body } = await check(text, of);
      expect([status, body.code, body.line]).toEqual([422, code, line]);
      expect(body.detail).toContain(`Line ${line} `);
    }
  });

  it("is refused where bytes are missing or too many", async () => {
    const part = (await hexOf(first, serial(1))).split("\n");
    const cut = await check(`${part.toSpliced(2, 1).join("\n")}`, serial(1));
    expect([cut.status, cut.body.code]).toEqual([422, "dump.incomplete"]);
    expect(cut.body.missing).toEqual([{ from: "0x0020", to: "0x002F" }]);
    const far = await check(hexAt([[0x7000, [1]]]), serial(1));
    expect(far.body).toMatchObject({ code: "dump.incomplete", missing: [{ from: "0x0000", to: "0x007F" }] });
    for (const length of [1, 127, 129, 4_096]) {
      const { status, body } = await check(new Uint8Array(length), serial(1));
      expect([status, body.code, body.expected, body.actual]).toEqual([422, "dump.wrong_length", 128, length]);
    }
    expect((await check(new Uint8Array(0), serial(1))).body.code).toBe("dump.empty");
    expect((await check(new Uint8Array(77), null)).body.match).toBe("unknown");
  });

  it("is not read as HEX where it is sent as raw bytes, be its first byte a colon", async () => {
    const bytes = new Uint8Array(128).fill(0x3a);
    expect((await check(bytes, serial(1))).body.match).toBe("differs");
  });

  it("takes a byte at the highest addresses without holding all that lies between", async () => {
    const text = record(0, [0xff, 0xff], 4) + record(0xfffe, [1, 2]) + END;
    expect((await check(text, null)).body.match).toBe("unknown");
  });

  it("is refused above one MiB, and as another type", async () => {
    const big = await check(new Uint8Array(1024 * 1024 + 1), serial(1));
    expect([big.status, big.body.code, big.body.maxBytes]).toEqual([413, "request.too_large", 1_048_576]);
    const typed = await check("x", serial(1), "application/json");
    expect([typed.status, typed.body.code]).toEqual([415, "request.unsupported_type"]);
  });
});

describe("who checks a dump", () => {
  it("is an engineer, a reviewer or service", async () => {
    const bytes = await image(first, serial(1));
    for (const as of ["engineer", "reviewer", "service"] as const)
      expect((await check(bytes, null, RAW, as)).status).toBe(200);
    for (const as of ["operator", "auditor", "admin"] as const)
      for (const of of [serial(1), null]) expect((await check(bytes, of, RAW, as)).body.code).toBe("auth.forbidden");
    expect((await api.call("POST", "/dumps", { body: bytes, headers: { "content-type": RAW } })).status).toBe(401);
    expect((await check(bytes, "NONE")).body.code).toBe("device.not_found");
    expect((await check(bytes, "no%20serial")).status).toBe(422);
  });
});
