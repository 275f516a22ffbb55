import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { sha256Hex } from "@/builders/bundle/sha256";
import { canonicalJson } from "@/lib/domain/canonical-json";

const vectors = JSON.parse(
  readFileSync(join(import.meta.dirname, "../../fixtures/published/vectors.json"), "utf8"),
) as {
  jcs_numbers_rfc8785_appB: Record<string, string>;
  jcs_numbers_must_fail: string[];
  sha256: Record<string, string>;
};

function doubleOf(bits: string): number {
  const view = new DataView(new ArrayBuffer(8));
  view.setBigUint64(0, BigInt(`0x${bits}`));
  return view.getFloat64(0);
}

const refused = expect.objectContaining({ code: "json.not_canonical" });

describe("canonical JSON", () => {
  // Source: RFC 8785, appendix B (bits of a binary64 and its text).
  it.each(Object.entries(vectors.jcs_numbers_rfc8785_appB))("writes the number %s as %s", (bits, text) => {
    expect(canonicalJson(doubleOf(bits))).toBe(text);
  });

  it.each(vectors.jcs_numbers_must_fail)("refuses the bits %s, which are no number", (bits) => {
    expect(() => canonicalJson({ value: doubleOf(bits) })).toThrow(refused);
  });

  // Source: RFC 8785, section 3.2.3: members by UTF-16 code units.
  it("sorts members by UTF-16 code units", () => {
    const keys = ["\u20ac", "\r", "\ufb33", "1", "\ud83d\ude00", "\u0080", "\u00f6"];
    const text = canonicalJson(Object.fromEntries(keys.map((key) => [key, 0])));
    expect(Object.keys(JSON.parse(text) as object).sort()).toEqual(keys.sort());
    const order = ["\r", "1", "\u0080", "\u00f6", "\u20ac", "\ud83d\ude00", "\ufb33"];
    expect(text).toBe(`{${order.map((key) => `${JSON.stringify(key)}:0`).join(",")}}`);
  });

  // Source: RFC 8785, section 3.2.2 sample; its canonical form has 118 bytes of UTF-8.
  it("writes the RFC's sample", () => {
    const sample = {
      // biome-ignore lint/correctness/noPrecisionLoss: the RFC's own literal; that it loses its last digit is what is tested
      numbers: [333333333.33333329, 1e30, 4.5, 2e-3, 0.000000000000000000000000001],
      string: "\u20ac$\u000f\u000aA'\u0042\u0022\u005c\\\"/",
      literals: [null, true, false],
    };
    const text = canonicalJson(sample);
    expect(text).toBe(
      '{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\\u000f\\nA\'B\\"\\\\\\\\\\"/"}',
    );
    expect(new TextEncoder().encode(text)).toHaveLength(118);
    expect(sha256Hex(text)).toMatch(/^2d5e01a3.*baacb$/);
  });

  it.each([
    ["half a surrogate pair", { text: "\ud83d" }],
    ["half a surrogate pair in a name", { "\ude00": 1 }],
    ["NaN", [Number.NaN]],
    ["a BigInt", { value: 1n }],
    ["nothing", undefined],
  ])("refuses %s", (_, value) => {
    expect(() => canonicalJson(value)).toThrow(refused);
  });

  it("refuses a cycle", () => {
    const cycle: Record<string, unknown> = {};
    cycle.self = cycle;
    expect(() => canonicalJson(cycle)).toThrow(refused);
  });

  it("leaves out what is undefined and keeps a text that only looks like an escape", () => {
    expect(canonicalJson({ b: undefined, a: "\\ud83d" })).toBe('{"a":"\\\\ud83d"}');
  });
});

// Source: FIPS 180-4 and RFC 6234 test data.
describe("SHA-256", () => {
  it.each(Object.entries(vectors.sha256))("of %s is %s", (text, digest) => {
    expect(sha256Hex(text === "a x 1000000" ? "a".repeat(1_000_000) : text)).toBe(digest);
    expect(sha256Hex(new TextEncoder().encode(text === "a x 1000000" ? "a".repeat(1_000_000) : text))).toBe(digest);
  });
});
