import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { sealOf } from "@/lib/domain/seal";
import { readSearchText } from "@/lib/domain/search-text";

describe("readSearchText", () => {
  it.each([
    [" mw20-00017 ", { code: "MW20-00017" }],
    ["1.2.0", { code: "1.2.0", package: { version: "1.2.0" } }],
    ["v1.2.0", { code: "V1.2.0", package: { version: "1.2.0" } }],
    ["mw20-2609 1.2.0", { code: "MW20-2609 1.2.0", package: { lot: "MW20-2609", version: "1.2.0" } }],
    ["MW20-2609@1.2.0", { code: "MW20-2609@1.2.0", package: { lot: "MW20-2609", version: "1.2.0" } }],
    ["DEADBEEF", { code: "DEADBEEF", digest: "deadbeef" }],
    ["dead", { code: "DEAD" }],
    ["01.2.0", { code: "01.2.0" }],
    ["two words", { code: "TWO WORDS" }],
  ])("reads %j", (text, meaning) => {
    expect(readSearchText(text)).toEqual(meaning);
  });

  it("finds a digest by two to four words of its seal, however they are set apart", () => {
    const hex = fc.stringMatching(/^[0-9a-f]{64}$/);
    fc.assert(
      fc.property(
        hex,
        fc.integer({ min: 2, max: 4 }),
        fc.constantFrom(" ", " · ", "-", ", "),
        (digest, count, between) => {
          const text = sealOf(digest).words.slice(0, count).join(between);
          expect(readSearchText(text.toUpperCase()).digest).toBe(digest.slice(0, 2 * count));
        },
      ),
    );
  });

  it("takes one word of a seal, or five, for no digest", () => {
    const { words } = sealOf("00".repeat(32));
    expect(readSearchText(words[0]).digest).toBeUndefined();
    expect(readSearchText([...words, words[0]].join(" ")).digest).toBeUndefined();
  });
});
