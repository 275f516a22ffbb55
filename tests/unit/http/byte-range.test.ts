import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { allowsRange, namesTag, readRange } from "@/lib/http/byte-range";

describe("Range (RFC 9110, section 14)", () => {
  // The examples of section 14.1.2 for a representation of 10,000 bytes.
  it.each([
    ["bytes=0-499", 0, 499],
    ["bytes=500-999", 500, 999],
    ["bytes=-500", 9500, 9999],
    ["bytes=9500-", 9500, 9999],
    ["bytes=0-0", 0, 0],
    ["bytes=-1", 9999, 9999],
    ["bytes=9999-20000", 9999, 9999],
    ["bytes=-20000", 0, 9999],
    ["BYTES=5-6", 5, 6],
  ])("%s is %i to %i of 10,000", (field, first, last) => {
    expect(readRange(field, 10_000)).toEqual({ first, last });
  });

  it.each([null, "", "bytes=-", "bytes=a-b", "lines=0-5", "bytes=0-1,5-6", "bytes=7-3", "bytes 0-4"])(
    "%s asks for the whole",
    (field) => {
      expect(readRange(field, 10_000)).toBeNull();
    },
  );

  it.each(["bytes=10000-", "bytes=10000-10001", "bytes=-0"])("%s names no byte that is there", (field) => {
    expect(() => readRange(field, 10_000)).toThrow(expect.objectContaining({ code: "request.range_invalid" }));
  });

  it("stays inside for any numbers", () => {
    fc.assert(
      fc.property(fc.nat(5000), fc.nat(5000), fc.integer({ min: 1, max: 3000 }), (a, b, length) => {
        if (a >= length || b < a) return;
        const range = readRange(`bytes=${a}-${b}`, length);
        expect(range).toEqual({ first: a, last: Math.min(b, length - 1) });
      }),
    );
  });
});

describe("entity tags", () => {
  it("are named by a list, weakly, or by a star", () => {
    expect(namesTag('"a", W/"b"', '"b"')).toBe(true);
    expect(namesTag("*", '"b"')).toBe(true);
    expect(namesTag('"a"', '"b"')).toBe(false);
    expect(namesTag(null, '"b"')).toBe(false);
  });

  it("allow a range only where If-Range is this very tag", () => {
    expect(allowsRange(null, '"b"')).toBe(true);
    expect(allowsRange('"b"', '"b"')).toBe(true);
    expect(allowsRange('W/"b"', '"b"')).toBe(false);
    expect(allowsRange("Tue, 01 Dec 2026 10:00:00 GMT", '"b"')).toBe(false);
  });
});
