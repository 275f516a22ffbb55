import { describe, expect, it } from "vitest";
import { compileLayout } from "@/builders/codec/compile-layout";
import { compareImages } from "@/builders/codec/difference";
import { toHex } from "@/builders/codec/files/hex-text";
import { checkChecksums, decodeImage, encodeImage, encodeImageInto, imageDigestBytes } from "@/builders/codec/image";
import { listRoundTripFaults } from "@/builders/codec/round-trip";
import type { ImageSources } from "@/builders/codec/sources";
import type { BitField, LayoutChecksum, LayoutField } from "@/schemas/documents/layout";
import { shapeProblems } from "@/schemas/documents/layout-shape";
import { oneFieldLayout, plainSources, smallLayout } from "../layouts";

const withVersion = (minor: number): ImageSources => plainSources({ package: { major: 1, minor, patch: 3 } });

/** What a field stores, as hex, and what its cells read back as. */
function stored(field: Partial<LayoutField>, sources = plainSources()) {
  const document = oneFieldLayout(field);
  expect(shapeProblems(document)).toEqual([]);
  const layout = compileLayout(document);
  const bytes = encodeImage(layout, sources);
  const decoded = decodeImage(layout, bytes).slice(0, -1);
  expect(listRoundTripFaults(layout, sources, bytes, decoded)).toEqual([]);
  const width = Math.max(...layout.fields.map((cell) => cell.at + cell.width));
  return { hex: toHex(bytes, 0, width), values: Object.fromEntries(decoded.map(({ name, value }) => [name, value])) };
}

const refusal = (field: Partial<LayoutField>, sources = plainSources()) => {
  const layout = compileLayout(oneFieldLayout(field));
  try {
    encodeImage(layout, sources);
  } catch (error) {
    return error;
  }
  throw new Error("it was encoded");
};

describe("bits of an integer", () => {
  const part = (name: string, from: number, width: number, value: number, more: Partial<BitField> = {}): BitField => ({
    name,
    from,
    width,
    value: { const: value },
    ...more,
  });

  // By hand: 5 in bits 0 to 2, −3 (two's complement of 4 bits: 1101) in bits 4 to 7, all others 1 as in the fill.
  it("stand where they say, the others as in the fill", () => {
    const bits = [part("mode", 0, 3, 5), part("offset", 4, 4, -3, { signed: true })];
    expect(stored({ type: "u16", byteOrder: "big", value: { bits } })).toEqual({
      hex: "ffdd",
      values: { "one.mode": 5, "one.offset": -3 },
    });
    expect(stored({ type: "u16", byteOrder: "little", value: { bits } }).hex).toBe("ddff");
  });

  it("take scale, names and sources", () => {
    const bits = [
      part("step", 0, 4, 1.5, { scale: 0.25 }),
      { ...part("curve", 4, 2, 0, { enum: { linear: 0, square: 2 } }), value: { const: "square" } },
      { ...part("minor", 8, 8, 0), value: { from: "package.minor" as const } },
    ];
    const { hex, values } = stored({ type: "u16", byteOrder: "big", value: { bits } });
    expect(hex).toBe("02e6");
    expect(values).toEqual({ "one.step": 1.5, "one.curve": "square", "one.minor": 2 });
  });

  it("fill 32 of them", () => {
    const bits = [part("high", 31, 1, 1), part("rest", 0, 31, 1)];
    expect(stored({ type: "u32", byteOrder: "big", value: { bits } }).hex).toBe("80000001");
    expect(stored({ type: "u32", byteOrder: "big", value: { bits: [part("all", 0, 32, 4294967295)] } }).hex).toBe(
      "ffffffff",
    );
  });

  it("refuse what does not fit, with serial, field, value and limit", () => {
    const bits = [{ ...part("minor", 0, 2, 0), value: { from: "package.minor" as const } }];
    expect(refusal({ type: "u8", value: { bits } }, withVersion(4))).toMatchObject({
      code: "image.value_out_of_range",
      details: { serial: "LC1-00007", field: "one.minor", value: 4, limit: 3 },
      message: "LC1-00007: one.minor = 4 does not fit into 2 bits; the most is 3",
    });
  });

  it("differ one by one", () => {
    const bits = [part("mode", 0, 3, 5), { ...part("minor", 3, 5, 0), value: { from: "package.minor" as const } }];
    const layout = compileLayout(oneFieldLayout({ type: "u8", value: { bits } }));
    const [from, to] = [2, 3].map((minor) => ({ layout, bytes: encodeImage(layout, withVersion(minor)) }));
    if (!from || !to) throw new Error("there are two");
    const { change, fields } = compareImages(from, to);
    expect(change).toBe("version-only");
    expect(fields[0]).toEqual({ name: "one.minor", from: 2, to: 3, unit: null, steps: 1 });
  });
});

describe("arrays", () => {
  it("stand one behind the other, each under its number", () => {
    expect(stored({ type: "i16", byteOrder: "big", count: 3, scale: 0.5, value: { const: [1, -1, 0] } })).toEqual({
      hex: "0002fffe0000",
      values: { "one[0]": 1, "one[1]": -1, "one[2]": 0 },
    });
  });

  it("repeat a source or a single constant", () => {
    const version = stored({ type: "u8", count: 3, value: { from: "package.minor" } });
    expect(version).toEqual({ hex: "020202", values: { "one[0]": 2, "one[1]": 2, "one[2]": 2 } });
    expect(stored({ type: "u8", count: 2, value: { const: 7 } }).hex).toBe("0707");
  });
});

describe("packed decimal", () => {
  // By hand: two digits a byte, most significant first where big-endian.
  it.each([
    [1, "big", 42, "42"],
    [2, "big", 1234, "1234"],
    [2, "little", 1234, "3412"],
    [3, "big", 7, "000007"],
    [4, "little", 20260930, "30092620"],
    [7, "big", 99999999999999, "99999999999999"],
  ] as const)("of %s bytes, %s, of %s is %s", (length, byteOrder, value, hex) => {
    expect(stored({ type: "bcd", length, byteOrder, value: { const: value } })).toEqual({
      hex,
      values: { one: value },
    });
  });

  it("takes scale and bias, and rounds half to even", () => {
    expect(stored({ type: "bcd", length: 2, byteOrder: "big", scale: 0.1, value: { const: 12.3 } }).hex).toBe("0123");
    expect(stored({ type: "bcd", length: 1, scale: 2, value: { const: 5 } }).hex).toBe("02");
  });

  it("refuses what has too many digits or is below 0", () => {
    const field = { type: "bcd" as const, length: 1, value: { from: "package.minor" as const } };
    expect(refusal(field, withVersion(100))).toMatchObject({
      code: "image.value_out_of_range",
      details: { value: 100, limit: 99 },
    });
    expect(refusal(field, withVersion(-1))).toMatchObject({ code: "image.value_out_of_range", details: { limit: 0 } });
  });

  it("holds no value where a half byte is no digit, and then no steps", () => {
    const layout = compileLayout(oneFieldLayout({ type: "bcd", length: 2, value: { const: 12 } }));
    const good = encodeImage(layout, plainSources());
    const bad = good.slice();
    bad[0] = 0x1a;
    expect(decodeImage(layout, bad)[0]).toMatchObject({ raw: "1a00", value: null });
    const { fields } = compareImages({ layout, bytes: good }, { layout, bytes: bad });
    expect(fields[0]).toMatchObject({ from: 12, to: null, steps: null });
  });
});

describe("fixed point", () => {
  // Total bits, fraction bits and sign are always stated, as the names of such formats are read in two ways.
  it.each([
    [24, 23, true, 0.5, "400000"],
    [24, 23, true, 0.1, "0ccccd"],
    [24, 23, true, -0.1, "f33333"],
    [24, 22, true, 1.000123, "400204"],
    [24, 20, true, -2.5, "d80000"],
    [16, 15, true, -1, "8000"],
    [8, 4, false, 15.9375, "ff"],
    [32, 31, false, 1.5, "c0000000"],
  ])("of %s bits, %s behind the point, signed %s, of %s is %s", (bits, fraction, signed, value, hex) => {
    const field = { type: "fixed" as const, bits, fraction, signed, byteOrder: "big" as const };
    expect(stored({ ...field, value: { const: value } }).hex).toBe(hex);
  });

  it("refuses +1 where all but the sign lie behind the point", () => {
    const field = { type: "fixed" as const, bits: 24, fraction: 23, signed: true };
    expect(refusal({ ...field, value: { from: "package.major" } })).toMatchObject({
      code: "image.value_out_of_range",
      details: { value: 1, limit: (2 ** 23 - 1) / 2 ** 23 },
    });
  });
});

describe("64 bits", () => {
  it.each([
    ["u64", "18446744073709551615", "ffffffffffffffff"],
    ["u64", "9007199254740993", "0020000000000001"],
    ["i64", "-9223372036854775808", "8000000000000000"],
    ["i64", "-1", "ffffffffffffffff"],
  ] as const)("%s of %s is %s", (type, value, hex) => {
    expect(stored({ type, byteOrder: "big", value: { const: value } })).toEqual({ hex, values: { one: value } });
  });

  it("takes numbers from sources and gives decimal digits back", () => {
    expect(stored({ type: "u64", byteOrder: "little", value: { from: "package.minor" } })).toEqual({
      hex: "0200000000000000",
      values: { one: "2" },
    });
    expect(refusal({ type: "u64", value: { from: "package.minor" } }, withVersion(-1))).toMatchObject({
      code: "image.value_out_of_range",
      details: { value: -1, limit: "0" },
    });
  });

  it("holds its limits before rounding", () => {
    expect(refusal({ type: "u64", max: 1, value: { from: "package.minor" } })).toMatchObject({
      code: "image.limit_exceeded",
      details: { value: 2, limit: 1 },
    });
  });
});

describe("names", () => {
  const names = { type: "u8" as const, enum: { linear: 1, square: 2 } };

  it("stand for their numbers, both ways", () => {
    expect(stored({ ...names, value: { const: "square" } })).toEqual({ hex: "02", values: { one: "square" } });
    expect(stored({ ...names, value: { const: 1 } })).toEqual({ hex: "01", values: { one: "linear" } });
    expect(stored({ ...names, value: { from: "package.minor" } }).values).toEqual({ one: "square" });
  });

  it("are the only values", () => {
    expect(refusal({ ...names, value: { from: "package.minor" } }, withVersion(3))).toMatchObject({
      code: "image.value_not_named",
      details: { serial: "LC1-00007", field: "one", value: 3 },
    });
    const layout = compileLayout(oneFieldLayout({ ...names, value: { const: 1 } }));
    const bytes = encodeImage(layout, plainSources());
    bytes[0] = 9;
    expect(decodeImage(layout, bytes)[0]?.value).toBeNull();
  });
});

describe("checksums", () => {
  const image = (change: Partial<LayoutChecksum>, sources = plainSources()) => {
    const sum = { name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 61] as [number, number], ...change };
    const document = smallLayout({ checksums: [sum] });
    expect(shapeProblems(document)).toEqual([]);
    const layout = compileLayout(document);
    return { layout, bytes: encodeImage(layout, sources) };
  };
  const sumOf = (bytes: Uint8Array) => bytes.subarray(0, 62).reduce((total, byte) => total + byte, 0);

  it("add bytes up, with their complements", () => {
    const plain = image({ algorithm: { sum: 16 } }).bytes;
    expect([plain[62], plain[63]]).toEqual([sumOf(plain) % 256, Math.floor(sumOf(plain) / 256)]);
    const twos = image({ algorithm: { sum: 8, complement: "twos" } }).bytes;
    expect((sumOf(twos) + (twos[62] as number)) % 256).toBe(0);
    const ones = image({ algorithm: { sum: 8, complement: "ones" } }).bytes;
    expect((sumOf(ones) + (ones[62] as number)) % 256).toBe(255);
  });

  it("combine bytes by exclusive or", () => {
    const { bytes } = image({ algorithm: { xor: 8 } });
    expect(bytes.subarray(0, 63).reduce((total, byte) => total ^ byte, 0)).toBe(0);
  });

  it("take parameters for a name", () => {
    const parameters = { width: 16, poly: "8005", init: "FFFF", refin: true, refout: true, xorout: "0000" };
    expect(image({ algorithm: parameters }).bytes).toEqual(image({}).bytes);
  });

  it("take 24 bits", () => {
    const parameters = { width: 24, poly: "864CFB", init: "B704CE", refin: false, refout: false, xorout: "0" };
    const { layout, bytes } = image({ at: 60, over: [0, 59], algorithm: parameters });
    expect(checkChecksums(layout, bytes)).toMatchObject([{ ok: true }]);
    expect(layout.checksums[0]?.width).toBe(3);
  });

  /** A sum over the one byte that the package's minor number is in: easily made what is forbidden. */
  const forbidding = { algorithm: { sum: 8 }, over: [40, 40] as [number, number], forbid: ["FF", "00"] };

  it("refuse an image whose checksum reads as erased, unless the layout says what stands instead", () => {
    expect(() => image(forbidding, withVersion(0xff))).toThrow(
      expect.objectContaining({
        code: "image.checksum_forbidden",
        details: expect.objectContaining({ serial: "LC1-00007", field: "sum", value: "FF", limit: null }),
      }),
    );
    const { layout, bytes } = image({ ...forbidding, instead: "01" }, withVersion(0xff));
    expect(bytes[62]).toBe(1);
    expect(checkChecksums(layout, bytes)).toEqual([{ name: "sum", ok: true, expected: 1, stored: 1 }]);
    expect(image(forbidding, withVersion(3)).bytes[62]).toBe(3);
  });

  it("are wrong where a forbidden value stands, though it is what was computed", () => {
    const { layout, bytes } = image({ ...forbidding, instead: "01" }, withVersion(0xff));
    bytes[62] = 0xff;
    expect(checkChecksums(layout, bytes)).toMatchObject([{ ok: false }]);
  });
});

describe("reserved ranges and segments", () => {
  it("leave reserved bytes at fill, inside checksums", () => {
    const layout = compileLayout(smallLayout({ reserved: [[42, 61]] }));
    const bytes = encodeImage(layout, plainSources());
    expect(bytes.subarray(42, 62).every((byte) => byte === 255)).toBe(true);
    bytes[50] = 0;
    expect(checkChecksums(layout, bytes)).toMatchObject([{ ok: false }]);
  });

  it("count the same bytes at other addresses as another image", () => {
    const at = (baseAddress: number) => {
      const memory = { ...smallLayout().memory, segments: [{ at: 44, baseAddress }] };
      const layout = compileLayout(smallLayout({ memory }));
      return { layout, bytes: encodeImage(layout, plainSources()) };
    };
    expect(compareImages(at(0x1000), at(0x1000)).change).toBe("same");
    expect(compareImages(at(0x1000), at(0x2000))).toMatchObject({ change: "values", fields: [], bytes: [] });
  });
});

describe("an image in a piece of memory that others share", () => {
  const sum = { name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 43] as [number, number] };
  const layout = compileLayout(smallLayout({ kept: [[44, 45]], checksums: [sum] }));

  it("is the same there, and leaves the others alone", () => {
    const memory = Buffer.alloc(3 * layout.bytes, 0x55);
    encodeImageInto(memory.subarray(layout.bytes, 2 * layout.bytes), layout, plainSources());
    const alone = encodeImage(layout, plainSources());
    expect(memory.subarray(layout.bytes, 2 * layout.bytes).equals(alone)).toBe(true);
    expect(memory.fill(0x55, layout.bytes, 2 * layout.bytes)).toEqual(Buffer.alloc(3 * layout.bytes, 0x55));
    expect(() => encodeImageInto(memory, layout, plainSources())).toThrow(`the layout ${layout.bytes}`);
  });

  it.each([
    ["typed array", (bytes: Uint8Array) => bytes],
    ["Buffer", (bytes: Uint8Array) => Buffer.from(bytes)],
  ])("keeps what a digest does not count, in a %s", (_, held) => {
    const bytes = held(new Uint8Array(layout.bytes).fill(7));
    expect([...imageDigestBytes(layout, bytes).subarray(43, 47)]).toEqual([7, layout.fill, layout.fill, 7]);
    expect([...bytes]).toEqual([...new Uint8Array(layout.bytes).fill(7)]);
  });
});
