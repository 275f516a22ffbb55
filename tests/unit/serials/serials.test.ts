import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { numberSerials, readSerials } from "@/lib/domain/serials";

describe("numberSerials", () => {
  it("numbers with zeros in front and goes past the digits", () => {
    const serials = numberSerials({ prefix: " mw20-2609-", from: 8, count: 3, digits: 1 });
    expect(serials).toEqual(["MW20-2609-8", "MW20-2609-9", "MW20-2609-10"]);
    expect(numberSerials({ prefix: "A", from: 1, count: 1, digits: 5 })).toEqual(["A00001"]);
  });

  it.each([
    ["count", { prefix: "A", from: 1, count: 0, digits: 5 }],
    ["count", { prefix: "A", from: 1, count: 60_001, digits: 5 }],
    ["from", { prefix: "A", from: -1, count: 1, digits: 5 }],
    ["digits", { prefix: "A", from: 1, count: 1, digits: 1.5 }],
    ["prefix", { prefix: "-", from: 1, count: 1, digits: 5 }],
    ["prefix", { prefix: "A".repeat(32), from: 1, count: 1, digits: 1 }],
  ])("refuses a rule by its %s", (field, rule) => {
    expect(() => numberSerials(rule)).toThrow(expect.objectContaining({ details: expect.objectContaining({ field }) }));
  });

  it("gives as many different serials as asked for", () => {
    fc.assert(
      fc.property(
        fc.nat(1_000_000),
        fc.integer({ min: 1, max: 200 }),
        fc.integer({ min: 1, max: 9 }),
        (from, count, digits) => {
          expect(new Set(numberSerials({ prefix: "S", from, count, digits })).size).toBe(count);
        },
      ),
    );
  });
});

describe("readSerials", () => {
  it("takes lines and separators, upper-cases, counts repeats and names what is no serial", () => {
    const read = readSerials("a1\r\nb2; C3\n\n*x, a1\tb.2");
    expect(read).toEqual({ serials: ["A1", "B2", "C3", "B.2"], refused: [{ line: 4, text: "*x" }], repeated: 1 });
  });

  it("reads back what a rule numbers", () => {
    const serials = numberSerials({ prefix: "X-", from: 0, count: 50, digits: 4 });
    expect(readSerials(serials.join("\n")).serials).toEqual(serials);
  });
});
