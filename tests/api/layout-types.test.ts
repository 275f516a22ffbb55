import { beforeAll, describe, expect, it } from "vitest";
import { compileLayout } from "@/builders/codec/compile-layout";
import { assembleImage } from "@/builders/codec/files/hex-image";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import { publishLayout, type ScenarioPeople } from "../support/scenario/family-lot";
import { type BuiltPackage, buildGolden } from "../support/scenario/packaged";

const FIRST = "MW20-2609-00001";
/** Kept: what the device itself writes there. */
const KEPT = [80, 87] as const;

/** A layout with every kind of member: two segments, packed decimal, names, bits, an array, fixed point, sums. */
function richLayout(firmware: string): LayoutDocument {
  const number = (name: string, at: number, field: Partial<LayoutField>): LayoutField =>
    ({ name, at, value: { from: `coefficients.${name}` }, ...field }) as LayoutField;
  return {
    format: "trimwright/layout@1",
    family: "MW-20",
    version: "2.0.0",
    firmware,
    order: 1,
    memory: {
      bytes: 128,
      pageBytes: 16,
      baseAddress: 0x100,
      fill: 255,
      byteOrder: "big",
      segments: [{ name: "trim", at: 64, baseAddress: 0x0800_0000 }],
    },
    kept: [[KEPT[0], KEPT[1]]],
    reserved: [[88, 95]],
    fields: [
      { name: "serial", at: 0, type: "ascii", length: 20, value: { from: "device.serial" } },
      { name: "versions", at: 20, type: "u8", count: 3, value: { from: "package.major" } },
      { name: "made", at: 23, type: "bcd", length: 4, value: { const: 20260930 } },
      { name: "curve", at: 27, type: "u8", enum: { linear: 1, square: 2 }, value: { const: "linear" } },
      {
        name: "status",
        at: 28,
        type: "u16",
        value: {
          bits: [
            { name: "layout", from: 0, width: 4, value: { from: "layout.major" } },
            { name: "capacity", from: 4, width: 8, unit: "kg", scale: 0.5, value: { from: "family.capacity" } },
          ],
        },
      },
      { name: "maker", at: 32, type: "u64", value: { const: "18446744073709551557" } },
      number("tempOffset", 64, { type: "f32" }),
      number("tempSlope", 68, { type: "f32" }),
      number("zero", 72, { type: "fixed", bits: 32, fraction: 26, signed: true, unit: "mV/V" }),
      number("zeroTc", 76, { type: "fixed", bits: 32, fraction: 40, signed: true, unit: "mV/V/K" }),
      number("gain", 96, { type: "fixed", bits: 32, fraction: 28, signed: false, unit: "1" }),
      number("gainTc", 100, { type: "i32", scale: 1e-12, unit: "1/K" }),
    ],
    checksums: [
      {
        name: "trimCrc",
        at: 124,
        algorithm: { width: 24, poly: "864CFB", init: "B704CE", refin: false, refout: false, xorout: "0" },
        over: [
          [64, 79],
          [88, 123],
        ],
        forbid: ["FFFFFF"],
        instead: "000000",
      },
      { name: "headSum", at: 63, algorithm: { sum: 8, complement: "twos" }, over: [0, 62] },
    ],
  };
}

let api: TestApi;
let derived: DerivedLot;
let built: BuiltPackage;
let document: LayoutDocument;

beforeAll(async () => {
  api = await openTestApi();
  const people: ScenarioPeople = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
  document = richLayout(JSON.parse(derived.layout).firmware);
  await publishLayout(people, JSON.stringify(document));
  built = await buildGolden(people, derived, { layout: "2.0.0" });
});

const image = (accept?: string) =>
  api.call("GET", `/packages/${built.id}/images/${FIRST}`, { as: "engineer", headers: accept ? { accept } : {} });

describe("a package by a layout with every kind of member", () => {
  it("is built, and every check that looks at its bytes passes", async () => {
    const { body } = await api.call("GET", `/packages/${built.id}`, { as: "reviewer" });
    expect(body.state).toBe("draft");
    const verdicts = Object.fromEntries(
      body.checks.map(({ code, verdict }: { code: string; verdict: string }) => [code, verdict]),
    );
    for (const code of ["limits", "round-trip", "reserved-bytes", "hex-reading", "repeatability", "twin"])
      expect([code, verdicts[code]]).toEqual([code, "pass"]);
  });

  it("decodes to one value each, with sources", async () => {
    const { body } = await image();
    const told = Object.fromEntries(
      body.fields.map(({ name, value, source }: { name: string; value: unknown; source: string | null }) => [
        name,
        [value, source],
      ]),
    );
    expect(told).toMatchObject({
      serial: [FIRST, "device.serial"],
      "versions[0]": [1, "package.major"],
      "versions[2]": [1, "package.major"],
      made: [20260930, null],
      curve: ["linear", null],
      "status.layout": [2, "layout.major"],
      "status.capacity": [20, "family.capacity"],
      maker: ["18446744073709551557", null],
    });
    expect(told.gain?.[1]).toBe("coefficients.gain");
    expect(body.checksums).toEqual([
      { name: "trimCrc", ok: true },
      { name: "headSum", ok: true },
    ]);
    const reserved = body.extents.filter(({ kind }: { kind: string }) => kind === "reserved");
    expect(reserved).toEqual([{ kind: "reserved", name: "reserved", at: 88, length: 8, source: null }]);
  });

  it("lies in both segments of the HEX, without what the device keeps", async () => {
    const { segments } = readIntelHex((await image("text/x-intel-hex")).body);
    expect(segments.map(({ address, bytes }) => [address, bytes.length])).toEqual([
      [0x100, 64],
      [0x0800_0000, KEPT[0] - 64],
      [0x0800_0000 + KEPT[1] + 1 - 64, 127 - KEPT[1]],
    ]);
    const raw = (await image("application/octet-stream")).body;
    expect(Buffer.from(assembleImage(compileLayout(document), segments).bytes).equals(raw)).toBe(true);
  });

  it("is what a dump from both segments is found to be, whatever the device keeps", async () => {
    const text: string = (await image("text/x-motorola-srecord")).body;
    const { body } = await api.call("POST", `/devices/${FIRST}/dump`, {
      as: "service",
      body: text,
      headers: { "content-type": "text/x-motorola-srecord" },
    });
    expect(body).toMatchObject({ match: "exact", serial: FIRST, package: built.id });
  });
});
