import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { compileLayout } from "@/builders/codec/compile-layout";
import { toHex } from "@/builders/codec/files/hex-text";
import { decodeImage, encodeImage } from "@/builders/codec/image";
import { roundHalfEven } from "@/builders/codec/round-half-even";
import type { ByteOrder, FieldType, LayoutDocument } from "@/schemas/documents/layout";
import { PYTHON, runTool } from "@/tests/support/programs";
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

  // Python's own arithmetic: round() goes to the nearest integer with ties to even, int.to_bytes is two's complement, struct
  // is IEEE 754, and packed decimal is the decimal digits read as hex.
  it("are stored as Python stores them, at random", () => {
    const cases = [...drawNumbers(600)];
    const script = `
import json, struct, sys
def stored(c):
    order, kind, value = c["byteOrder"], c["type"], c["value"]
    if kind in ("f32", "f64"):
        return struct.pack((">" if order == "big" else "<") + ("f" if kind == "f32" else "d"), value)
    step = round((value - c.get("bias", 0)) / c.get("scale", 1))
    if kind == "bcd":
        digits = bytes.fromhex(str(step).zfill(2 * c["length"]))
        return digits if order == "big" else digits[::-1]
    bits = c["bits"] if kind == "fixed" else int(kind[1:])
    return step.to_bytes(bits // 8, order, signed=c["signed"] if kind == "fixed" else kind[0] == "i")
print(json.dumps([stored({**c, "scale": 2.0 ** -c["fraction"]} if c["type"] == "fixed" else c).hex() for c in json.load(sys.stdin)]))`;
    const expected = JSON.parse(runTool(PYTHON, ["-c", script], JSON.stringify(cases)).toString()) as string[];
    const ours = cases.map(({ type, value, byteOrder, ...more }) => store(type, value, byteOrder, more).hex);
    expect(ours).toEqual(expected);
  });
});

/** Numbers of every type at random scales, the same every time. */
function* drawNumbers(count: number) {
  let state = 0x2545f491;
  const random = () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
  const scales = [1, 1e-6, 2.5e-9, 0.125, -0.01, 1 / 3];
  const types = ["u8", "i8", "u16", "i16", "u24", "i24", "u32", "i32", "f32", "f64", "fixed", "bcd"] as const;
  for (let i = 0; i < count; i++) {
    const type = types[i % types.length] as (typeof types)[number];
    const byteOrder: ByteOrder = random() < 0.5 ? "big" : "little";
    const scale = scales[Math.floor(random() * scales.length)] as number;
    const bias = random() < 0.5 ? 0 : Math.round(random() * 100) / 8;
    // Half of them lie on or half way between steps.
    const step = (low: number, high: number) => {
      const drawn = low + random() * (high - low);
      return random() < 0.5 ? Math.floor(drawn * 2) / 2 : drawn;
    };
    if (type === "f32" || type === "f64") {
      yield { type, byteOrder, value: (random() - 0.5) * 10 ** Math.floor(random() * 60 - 30) };
    } else if (type === "fixed") {
      const [bits, fraction, signed] = [8 * (1 + Math.floor(random() * 4)), Math.floor(random() * 40), random() < 0.5];
      const top = 2 ** (signed ? bits - 1 : bits) - 1;
      yield { type, byteOrder, bits, fraction, signed, value: step(signed ? -top : 0, top) / 2 ** fraction };
    } else if (type === "bcd") {
      const length = 1 + Math.floor(random() * 5);
      yield { type, byteOrder, length, scale, bias, value: step(1, 10 ** (2 * length) - 2) * scale + bias };
    } else {
      const bits = Number(type.slice(1));
      const top = 2 ** (type.startsWith("i") ? bits - 1 : bits) - 2;
      yield { type, byteOrder, scale, bias, value: step(type.startsWith("i") ? -top : 1, top) * scale + bias };
    }
  }
}
