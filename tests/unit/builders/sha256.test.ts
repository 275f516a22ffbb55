import { createHash } from "node:crypto";
import { describe, expect, it } from "vitest";
import { canonicalArraySha256, sha256Hex, sha256InSteps } from "@/builders/bundle/sha256";
import { canonicalJson } from "@/lib/domain/canonical-json";
import { finish } from "@/lib/domain/steps";

describe("SHA-256 in steps", () => {
  it.each([0, 1, 1_048_575, 1_048_576, 1_048_577, 3_000_000])("is that of %i bytes at once", (length) => {
    const bytes = Buffer.alloc(length, "the same bytes again and again, ");
    expect(finish(sha256InSteps(bytes))).toEqual(createHash("sha256").update(bytes).digest());
  });

  it.each([0, 1, 499, 500, 501, 1_000, 1_234])("is that of the canonical form of %i items", (count) => {
    const items = Array.from({ length: count }, (_, i) => [{ z: i / 3, a: "ä" }, `S-${i}`, null, [i]][i % 4]);
    expect(finish(canonicalArraySha256(items))).toBe(sha256Hex(canonicalJson(items)));
  });

  it("of FIPS 180-4's example is the published one", () => {
    // FIPS 180-4, example of a message of one block: "abc".
    const published = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
    expect(finish(sha256InSteps(Buffer.from("abc"))).toString("hex")).toBe(published);
  });
});
