import { describe, expect, it } from "vitest";
import { lintLayout } from "@/builders/codec/lint/lint";
import { listExtents, listGaps } from "@/builders/codec/memory-map";
import { layoutStep } from "@/lib/domain/semver-step";
import type { BitField, LayoutChecksum, LayoutDocument, LayoutField, MemorySegment } from "@/schemas/documents/layout";
import { oneFieldLayout, smallLayout } from "../layouts";

const withField = (field: Partial<LayoutField>): LayoutDocument => {
  const layout = smallLayout();
  return { ...layout, fields: [...layout.fields, { name: "one", at: 44, type: "u8", value: { const: 0 }, ...field }] };
};
const withSum = (sum: Partial<LayoutChecksum>) =>
  smallLayout({ checksums: [{ name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 61], ...sum }] });
const withSegments = (...segments: MemorySegment[]) => smallLayout({ memory: { ...smallLayout().memory, segments } });
const errors = (layout: unknown) => lintLayout(layout).errors.map(({ path, code }) => `${path} ${code}`);
const bits = (...parts: Partial<BitField>[]) => ({
  bits: parts.map((part, i): BitField => ({ name: `p${i}`, from: i, width: 1, value: { const: 0 }, ...part })),
});

describe("fields of the wider types", () => {
  it.each<[string, Partial<LayoutField>]>([
    ["an array", { type: "u16", count: 3, value: { const: [1, 2, 3] } }],
    ["fixed point", { type: "fixed", bits: 24, fraction: 20, signed: true, min: -2.5, max: 2.5, value: { const: 1 } }],
    ["packed decimal", { type: "bcd", length: 3, value: { const: 260930 } }],
    ["64 bits", { type: "i64", at: 48, value: { const: "-9223372036854775808" } }],
    ["names", { enum: { linear: 1, square: 2 }, value: { const: "square" } }],
    ["bits", { type: "u16", value: bits({ width: 4, from: 0 }, { width: 12, from: 4 }) }],
  ])("are free of errors: %s", (_, field) => {
    expect(errors(withField(field))).toEqual([]);
  });

  it.each<[string, Partial<LayoutField>, string]>([
    ["fixed point without bits", { type: "fixed", fraction: 2, signed: true }, "/bits field.bits_missing"],
    ["fixed point without a fraction", { type: "fixed", bits: 8, signed: true }, "/fraction field.fraction_missing"],
    ["fixed point without a sign", { type: "fixed", bits: 8, fraction: 2 }, "/signed field.signed_missing"],
    [
      "fixed point with a scale",
      { type: "fixed", bits: 8, fraction: 2, signed: false, scale: 2 },
      "/scale field.scale_not_allowed",
    ],
    [
      "a limit that fixed point does not reach",
      { type: "fixed", bits: 8, fraction: 7, signed: true, max: 1 },
      "/max field.type_too_narrow",
    ],
    ["packed decimal without a length", { type: "bcd" }, "/length field.length_missing"],
    ["packed decimal of 8 bytes", { type: "bcd", length: 8 }, "/length field.length_missing"],
    ["too many digits", { type: "bcd", length: 1, value: { const: 100 } }, "/value/const field.const_out_of_range"],
    ["64 bits as a rounded number", { type: "u64", value: { const: 2 ** 60 } }, "/value/const field.const_type"],
    [
      "64 bits beyond",
      { type: "u64", value: { const: "18446744073709551616" } },
      "/value/const field.const_out_of_range",
    ],
    ["64 bits with leading zeros", { type: "u64", value: { const: "007" } }, "/value/const field.const_type"],
    ["64 bits with a scale", { type: "u64", scale: 2 }, "/scale field.scale_not_allowed"],
    ["a name that is none", { enum: { a: 1 }, value: { const: "b" } }, "/value/const field.const_not_named"],
    ["two names for one number", { enum: { a: 0, b: 0 } }, "/enum/b field.enum_ambiguous"],
    ["a name beyond the type", { enum: { a: 0, b: 256 } }, "/enum/b field.enum_out_of_range"],
    ["names with a scale", { enum: { a: 0 }, scale: 2 }, "/scale field.member_not_allowed"],
    ["names of a float", { type: "f32", enum: { a: 0 } }, "/enum field.member_not_allowed"],
    ["a list for no array", { value: { const: [1, 2] } }, "/value/const field.const_count"],
    ["a list of another length", { count: 3, value: { const: [1, 2] } }, "/value/const field.const_count"],
    ["an element beyond the type", { count: 2, value: { const: [1, 256] } }, "/value/const/1 field.const_out_of_range"],
    [
      "texts in an array",
      { type: "ascii", length: 2, count: 2, value: { const: "a" } },
      "/count field.member_not_allowed",
    ],
    [
      "a text source in packed decimal",
      { type: "bcd", length: 2, value: { from: "device.serial" } },
      "/value/from field.source_type",
    ],
    ["bits of a signed integer", { type: "i8", value: bits({}) }, "/type field.bits_type"],
    ["bits with a scale of the whole", { scale: 2, value: bits({}) }, "/scale field.member_not_allowed"],
    ["bits beyond the integer", { value: bits({ from: 7, width: 2 }) }, "/value/bits/0/width field.bits_outside"],
    ["bits twice", { value: bits({ width: 3 }, { from: 2 }) }, "/value/bits/1/from field.bits_overlap"],
    ["two parts of one name", { value: bits({ name: "a" }, { name: "a" }) }, "/value/bits/1/name field.duplicate_name"],
    [
      "a part that is too narrow",
      { value: bits({ value: { const: 2 } }) },
      "/value/bits/0/value/const field.const_out_of_range",
    ],
    [
      "a part with a text source",
      { value: bits({ value: { from: "lot.code" } }) },
      "/value/bits/0/value/from field.source_type",
    ],
  ])("tell %s", (_, field, expected) => {
    expect(errors(withField(field))).toContain(`/fields/8${expected}`);
  });

  it.each<[string, unknown, RegExp]>([
    ["a count that is none", { count: 0 }, /count/],
    ["bits that are no list", { value: { bits: 3 } }, /value/],
    ["bits without a name", { value: { bits: [{ from: 0, width: 1, value: { const: 0 } }] } }, /without a name/],
    ["names of no numbers", { enum: { a: "1" } }, /enum/],
    ["an empty list", { value: { const: [] } }, /value/],
  ])("tell the shape of %s", (_, field, message) => {
    const found = lintLayout(withField(field as Partial<LayoutField>)).errors;
    expect(found).toContainEqual({ path: "/fields/8", code: "layout.shape", message: expect.stringMatching(message) });
  });

  it("find coefficients in bits and arrays", () => {
    const layout = smallLayout();
    const gain: LayoutField = {
      name: "gain",
      at: 32,
      type: "u32",
      value: bits({ from: 0, width: 24, scale: 2 ** -22, value: { from: "coefficients.gain" } }),
    };
    const fields = layout.fields.map((field) => (field.name === "gain" ? gain : field));
    expect(errors({ ...layout, fields })).toEqual([]);
  });

  it("judge an array's element as a whole number, and its place by all of them", () => {
    const { warnings } = lintLayout(withField({ type: "u16", count: 12, value: { const: 1 } }));
    expect(warnings.map(({ code }) => code)).not.toContain("field.unaligned");
    expect(errors(withField({ type: "u16", count: 10, value: { const: 1 } }))).toContain(
      "/checksums/0 checksum.overlap",
    );
  });
});

describe("checksums", () => {
  const crc = { width: 16, poly: "1021", init: "FFFF", refin: false, refout: false, xorout: "0000" };

  it.each<[string, Partial<LayoutChecksum>]>([
    ["parameters", { algorithm: crc }],
    [
      "a sum over several ranges",
      {
        algorithm: { sum: 16, complement: "twos" },
        over: [
          [0, 15],
          [32, 61],
        ],
      },
    ],
    ["an exclusive or", { algorithm: { xor: 8 } }],
    ["a forbidden value with another instead", { forbid: ["FFFF"], instead: "0000" }],
  ])("are free of errors: %s", (_, sum) => {
    expect(errors(withSum(sum))).toEqual([]);
  });

  it.each<[string, Partial<LayoutChecksum>, string]>([
    ["a size that is not offered", { algorithm: { ...crc, width: 12 } }, "/algorithm checksum.unknown_algorithm"],
    ["a sum of 24 bits", { algorithm: { sum: 24 } }, "/algorithm checksum.unknown_algorithm"],
    [
      "a polynomial that is too wide",
      { algorithm: { ...crc, poly: "11021" } },
      "/algorithm/poly checksum.parameter_too_wide",
    ],
    ["a polynomial turned round", { algorithm: { ...crc, poly: "8408" } }, "/algorithm/poly checksum.poly_even"],
    ["a forbidden value that is too wide", { forbid: ["1FFFF"] }, "/forbid/0 checksum.parameter_too_wide"],
    [
      "another value that is forbidden too",
      { forbid: ["FFFF"], instead: "ffff" },
      "/instead checksum.instead_forbidden",
    ],
    ["another value for nothing", { instead: "0000" }, "/instead checksum.nothing_forbidden"],
    [
      "a byte that is run through twice",
      {
        over: [
          [0, 9],
          [9, 12],
        ],
      },
      "/over/1 checksum.ranges_overlap",
    ],
    [
      "a range beyond the memory",
      {
        over: [
          [0, 9],
          [20, 64],
        ],
      },
      "/over/1 checksum.range_outside_memory",
    ],
    [
      "its own place among its ranges",
      {
        over: [
          [0, 9],
          [20, 63],
        ],
      },
      "/over checksum.covers_itself",
    ],
  ])("tell %s", (_, sum, expected) => {
    expect(errors(withSum(sum))).toContain(`/checksums/0${expected}`);
  });

  it("cover a field by two ranges that touch", () => {
    const codes = (over: LayoutChecksum["over"]) => lintLayout(withSum({ over })).warnings.map(({ code }) => code);
    expect(
      codes([
        [0, 20],
        [21, 61],
      ]),
    ).not.toContain("field.not_covered");
    expect(
      codes([
        [0, 20],
        [22, 61],
      ]),
    ).toContain("field.not_covered");
  });
});

describe("reserved ranges and segments", () => {
  it("refuse what lies on a reserved range", () => {
    expect(errors(smallLayout({ reserved: [[42, 61]] }))).toEqual([]);
    expect(errors(smallLayout({ reserved: [[40, 50]] }))).toContain("/fields/7 field.over_reserved");
    expect(errors(smallLayout({ reserved: [[50, 40]] }))).toContain("/reserved/0 reserved.range_invalid");
  });

  it("refuse what lies across two segments, at one address twice, or beyond", () => {
    expect(errors(withSegments({ at: 44, baseAddress: 0x1000 }))).toEqual([]);
    expect(errors(withSegments({ at: 41, baseAddress: 0x1000 }))).toContain("/fields/7/at field.over_segment_edge");
    expect(errors(withSegments({ at: 44, baseAddress: 20 }))).toContain(
      "/memory/segments/0/baseAddress segment.overlap",
    );
    expect(errors(withSegments({ at: 64, baseAddress: 0x1000 }))).toContain(
      "/memory/segments/0/at segment.outside_memory",
    );
    expect(errors(withSegments({ at: 44, baseAddress: 2 ** 32 - 4 }))).toContain(
      "/memory/segments/0/baseAddress memory.beyond_address_space",
    );
    expect(errors(withSegments({ at: 44, baseAddress: 256 }, { at: 44, baseAddress: 512 }))).toContain(
      "/memory/segments/1/at segment.same_place",
    );
  });

  it("judge pages and alignment by addresses", () => {
    const codes = (baseAddress: number) =>
      lintLayout(withSegments({ at: 24, baseAddress })).warnings.map((one) => one.path);
    expect(codes(0x1000)).not.toContain("/fields/3/at");
    expect(codes(0x1002)).toContain("/fields/3/at");
  });

  it("stand in the memory map", () => {
    const extents = listExtents(smallLayout({ reserved: [[42, 61]] }));
    expect(extents.filter(({ kind }) => kind === "reserved")).toEqual([
      { kind: "reserved", name: "reserved", at: 42, end: 62, path: "/reserved/0" },
    ]);
    expect(listGaps(extents, 64)).toEqual([[12, 15]]);
    const array = listExtents(oneFieldLayout({ type: "u16", count: 4, value: { const: 1 } }));
    expect(array[0]).toMatchObject({ name: "one", at: 0, end: 8 });
  });
});

describe("the version step", () => {
  const stepOf = (from: LayoutDocument, to: LayoutDocument) => layoutStep(from, to).step;
  const fixed = (change: Partial<LayoutField>) =>
    withField({ type: "fixed", bits: 16, fraction: 8, signed: true, value: { const: 1 }, ...change });
  const named = withField({ enum: { linear: 1, square: 2 }, value: { const: 1 } });

  it.each<[string, LayoutDocument, LayoutDocument]>([
    ["the fraction", fixed({}), fixed({ fraction: 9 })],
    ["the sign", fixed({}), fixed({ signed: false })],
    ["the elements", withField({ count: 2 }), withField({ count: 3 })],
    [
      "an element's constant",
      withField({ count: 2, value: { const: [1, 2] } }),
      withField({ count: 2, value: { const: [1, 3] } }),
    ],
    ["a part's place", withField({ value: bits({ from: 0 }) }), withField({ value: bits({ from: 1 }) })],
    ["a part's scale", withField({ value: bits({}) }), withField({ value: bits({ scale: 2 }) })],
    [
      "a checksum's parameters",
      withSum({ algorithm: { sum: 8 } }),
      withSum({ algorithm: { sum: 8, complement: "ones" } }),
    ],
    [
      "the order of ranges",
      withSum({
        over: [
          [0, 9],
          [20, 29],
        ],
      }),
      withSum({
        over: [
          [20, 29],
          [0, 9],
        ],
      }),
    ],
    ["what is forbidden", withSum({}), withSum({ forbid: ["FFFF"] })],
    [
      "what stands instead",
      withSum({ forbid: ["FFFF"], instead: "0000" }),
      withSum({ forbid: ["FFFF"], instead: "0001" }),
    ],
    ["a segment's address", withSegments({ at: 44, baseAddress: 256 }), withSegments({ at: 44, baseAddress: 512 })],
    ["a new segment", smallLayout(), withSegments({ at: 44, baseAddress: 512 })],
  ])("is major where %s changes", (_, from, to) => {
    expect(stepOf(from, to)).toBe("major");
  });

  it.each<[string, LayoutDocument, LayoutDocument]>([
    ["a name of a number", named, withField({ enum: { straight: 1, square: 2 }, value: { const: 1 } })],
    ["a constant by its name", named, withField({ enum: { linear: 1, square: 2 }, value: { const: "linear" } })],
    ["a part's limits", withField({ value: bits({}) }), withField({ value: bits({ max: 1 }) })],
    [
      "a segment's name",
      withSegments({ at: 44, baseAddress: 256 }),
      withSegments({ name: "b", at: 44, baseAddress: 256 }),
    ],
    ["one range written as a list", withSum({}), withSum({ over: [[0, 61]] })],
    ["digits in another case", withSum({ forbid: ["FFFF"] }), withSum({ forbid: ["ffff"] })],
    [
      "parameters in another order",
      withSum({ algorithm: { width: 16, poly: "8005", init: "FFFF", refin: true, refout: true, xorout: "0000" } }),
      withSum({ algorithm: { xorout: "0", refout: true, refin: true, init: "ffff", poly: "8005", width: 16 } }),
    ],
    [
      "no complement by its name",
      withSum({ algorithm: { sum: 8 } }),
      withSum({ algorithm: { sum: 8, complement: "none" } }),
    ],
  ])("is patch where only %s is another", (_, from, to) => {
    expect(stepOf(from, to)).toBe("patch");
  });

  it("is minor where fill becomes reserved, as the bytes stay the same, and none of it is used", () => {
    expect(stepOf(smallLayout(), smallLayout({ reserved: [[42, 61]] }))).not.toBe("major");
  });
});
