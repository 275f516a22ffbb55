import { describe, expect, it } from "vitest";
import { joinShape, lintLayout } from "@/builders/codec/lint/lint";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { shapeProblems } from "@/schemas/documents/layout-shape";
import { smallLayout } from "../builders/layouts";

const found = (document: unknown) =>
  joinShape(shapeProblems(document), lintLayout(document)).errors.map(({ path, message }) => `${path} ${message}`);

function withChecksum(change: object): unknown {
  const layout = smallLayout();
  return { ...layout, checksums: [{ ...layout.checksums[0], ...change }] };
}

function withValue(value: unknown): unknown {
  const layout: LayoutDocument = smallLayout();
  return { ...layout, fields: [...layout.fields, { name: "more", at: 44, type: "u8", value }] };
}

const crc = { width: 16, poly: "1021", init: "FFFF", refin: false, refout: false, xorout: "0" };
const { width, poly, ...halfCrc } = crc;
const ALGORITHMS =
  "an algorithm is the name of a CRC such as “CRC-16/IBM-3740”, a CRC by “width”, “poly”, “init”, “refin”, “refout” and “xorout”, {“sum”: 8, 16 or 32} or {“xor”: 8}";

describe("an algorithm with one thing wrong gives one error, of what is wrong", () => {
  it.each<[unknown, string]>([
    [{ xor: 32 }, "/xor “xor” must be 8, not 32"],
    [{ xor: "8" }, '/xor “xor” must be 8, not "8"'],
    [{ sum: 24 }, "/sum “sum” must be 8, 16 or 32, not 24"],
    [{ sum: 8, complement: "two" }, '/complement “complement” must be none, ones or twos, not "two"'],
    [{ sum: 8, bits: 8 }, "/bits “bits” is not known here"],
    [{ sum: 8, xor: 8 }, ` “sum” and “xor” do not go together: ${ALGORITHMS}`],
    [{ crc: 16 }, ` “crc” is not known here: ${ALGORITHMS}`],
    [{}, ` nothing stands here: ${ALGORITHMS}`],
    [7, ` ${ALGORITHMS}, not 7`],
    [{ ...crc, width: 12 }, "/width “width” must be 8, 16, 24 or 32, not 12"],
    [{ ...crc, poly: "0x1021" }, '/poly “poly” must be 1 to 8 hex digits in quotes, not "0x1021"'],
    [{ ...crc, init: 65535 }, "/init “init” must be 1 to 8 hex digits in quotes, not 65535"],
    [{ ...crc, refin: "no" }, '/refin “refin” must be true or false, not "no"'],
    [{ width, ...halfCrc }, "/poly “poly” is missing"],
    [halfCrc, " “width” and “poly” are missing"],
  ])("%j", (algorithm, expected) => {
    expect(found(withChecksum({ algorithm }))).toEqual([`/checksums/0/algorithm${expected}`]);
  });

  it("lists the catalogue for a name that is not in it", () => {
    const errors = found(withChecksum({ algorithm: "CRC-16/NONE" }));
    expect(errors).toHaveLength(1);
    expect(errors[0]).toMatch(/^\/checksums\/0\/algorithm must be one of CRC-8\/SMBUS, /);
  });
});

describe("a value that comes from nowhere gives one error", () => {
  const VALUES = "a value is {“from”: a source}, {“const”: a number, text or list} or {“bits”: a list of parts}";

  it.each<[unknown, string]>([
    [{ fro: "lot.code" }, ` “fro” is not known here: ${VALUES}`],
    [{}, ` nothing stands here: ${VALUES}`],
    ["device.serial", ` ${VALUES}, not "device.serial"`],
    [{ from: "package.minor", const: 1 }, ` “from” and “const” do not go together: ${VALUES}`],
    [{ const: {} }, "/const “const” must be a number, a text or a list of them, not {}"],
    [{ bits: [{ name: "a", from: 0, width: 1, value: { cons: 1 } }] }, "/bits/0/value/cons “cons” is not known here"],
  ])("%j", (value, expected) => {
    expect(found(withValue(value))).toEqual([`/fields/8/value${expected}`]);
  });

  it("lists the sources for one that is none", () => {
    const errors = found(withValue({ from: "nowhere" }));
    expect(errors).toHaveLength(1);
    expect(errors[0]).toMatch(/^\/fields\/8\/value\/from must be one of device\.serial, /);
  });
});

describe("covered bytes", () => {
  it("that are no range give one error", () => {
    for (const over of [[1], 3, {}, [], ["a", 2]]) {
      expect(found(withChecksum({ over }))).toEqual([
        "/checksums/0/over “over” must be a range [from, to], both whole numbers from 0, or a list of such ranges",
      ]);
    }
  });

  it("of several ranges say which one is wrong", () => {
    const errors = found(withChecksum({ over: [[0, 3], [4]] }));
    expect(errors).toHaveLength(1);
    expect(errors[0]).toMatch(/^\/checksums\/0\/over\/1 /);
  });
});

it("findings of meaning about a part as a whole stay beside a wrong member of it", () => {
  const layout = smallLayout();
  const clash = { name: "more", at: 4, type: "u8", colour: "red", value: { const: 0 } };
  const errors = found({ ...layout, fields: [...layout.fields, clash] });
  expect(errors).toContain("/fields/8/colour “colour” is not known here");
  expect(errors.some((one) => one.startsWith("/fields/8 ") && one.includes("share"))).toBe(true);
});
