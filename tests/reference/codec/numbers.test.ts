import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { compileLayout } from "@/builders/codec/compile-layout";
import { toHex } from "@/builders/codec/hex-text";
import { decodeImage, encodeImage } from "@/builders/codec/image";
import { roundHalfEven } from "@/builders/codec/round-half-even";
import type { ByteOrder, FieldType, LayoutDocument } from "@/schemas/documents/layout";
import { oneFieldLayout, plainSources } from "@/tests/unit/builders/layouts";

const vectors = JSON.parse(
  readFileSync(join(import.meta.dirname, "../../fixtures/published/vectors.json"), "utf8"),
) as {
  binary32_be: Record<string, string>;
  twos_complement_24: Record<string, string>;
};

function store(
  type: FieldType,
  value: number,
  byteOrder: ByteOrder,
  more: Partial<LayoutDocument["fields"][number]> = {},
) {
  const compiled = compileLayout(oneFieldLayout({ type, byteOrder, value: { const: value }, ...more }));
  const bytes = encodeImage(compiled, plainSources());
  const [decoded] = decodeImage(compiled, bytes);
  return { hex: toHex(bytes, 0, compiled.fields[0]?.width), value: decoded?.value };
}

const reversed = (hex: string) => (hex.match(/../g) ?? []).reverse().join("");

describe("numbers as stored", () => {
  // Source: IEEE 754 binary32 and binary64 encodings, computed apart from this code (tests/fixtures/published/vectors.json).
  it.each(Object.entries(vectors.binary32_be))("binary32 of %s is %s", (text, hex) => {
    const value = text === "1/3" ? 1 / 3 : Number(text);
    expect(store("f32", value, "big").hex).toBe(hex);
    expect(store("f32", value, "little").hex).toBe(reversed(hex));
  });

  it.each([
    [16777217, "4b800000"],
    [3.4028234663852886e38, "7f7fffff"],
    [1.1754943508222875e-38, "00800000"],
    [1.401298464324817e-45, "00000001"],
  ])("binary32 of %s is %s", (value, hex) => {
    expect(store("f32", value, "big").hex).toBe(hex);
  });

  it.each([
    [0.1, "3fb999999999999a"],
    [-2.5, "c004000000000000"],
    [1 / 3, "3fd5555555555555"],
  ])("binary64 of %s is %s", (value, hex) => {
    expect(store("f64", value, "big").hex).toBe(hex);
    expect(store("f64", value, "little").hex).toBe(reversed(hex));
  });

  it.each(Object.entries(vectors.twos_complement_24))("24-bit two's complement of %s is %s", (text, hex) => {
    expect(store("i24", Number(text), "big")).toEqual({ hex: hex.toLowerCase(), value: Number(text) });
    expect(store("i24", Number(text), "little").hex).toBe(reversed(hex.toLowerCase()));
  });

  // Fixed point with n fraction bits is a scale of 2^−n; formats are named by total bits, fraction bits and sign, as the
  // customary short names count the sign in two ways.
  it.each([
    ["i24", 23, 0.5, "400000"],
    ["i24", 23, 0.1, "0ccccd"],
    ["i24", 23, -0.1, "f33333"],
    ["i24", 23, 0.9999999, "7fffff"],
    ["i24", 22, 1.000123, "400204"],
    ["i24", 22, 0.999, "3fef9e"],
    ["i24", 20, -2.5, "d80000"],
    ["i16", 15, 0.1, "0ccd"],
    ["i16", 15, -1, "8000"],
  ] as const)("%s with %s fraction bits of %s is %s", (type, bits, value, hex) => {
    expect(store(type, value, "big", { scale: 2 ** -bits }).hex).toBe(hex);
    const named = { bits: Number(type.slice(1)), fraction: bits, signed: true };
    expect(store("fixed", value, "big", named).hex).toBe(hex);
    expect(store("fixed", value, "little", named).hex).toBe(reversed(hex));
  });

  it.each([
    [0.5, 0],
    [1.5, 2],
    [2.5, 2],
    [-0.5, 0],
    [-1.5, -2],
    [-2.5, -2],
    [0.49999999999999994, 0],
    [-0.49999999999999994, 0],
    [4503599627370495.5, 4503599627370496],
    [4503599627370497, 4503599627370497],
    [-3.2, -3],
  ])("rounds %s to %s, ties to even (IEEE 754 roundTiesToEven)", (value, rounded) => {
    expect(roundHalfEven(value)).toBe(rounded);
  });
});
