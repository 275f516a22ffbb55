import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { jsonPositions, lineFinder, nearestSpan } from "@/lib/domain/json-positions";

const slice = (text: string, pointer: string) => {
  const span = jsonPositions(text).get(pointer);
  return span && text.slice(span.from, span.end);
};

describe("jsonPositions", () => {
  it("finds values in objects and lists, and escapes pointers", () => {
    const text = '{ "a": [1, {"b/c": "x\\"y"}],\n "~": null }';
    expect(slice(text, "/a/0")).toBe("1");
    expect(slice(text, "/a/1/b~1c")).toBe('"x\\"y"');
    expect(slice(text, "/~0")).toBe("null");
    expect(slice(text, "/a/2")).toBeUndefined();
  });

  it("goes as far as the text is JSON", () => {
    const text = '{ "a": 1, "b": [2, , 3], "c": 4 }';
    expect(slice(text, "/a")).toBe("1");
    expect(slice(text, "/b/0")).toBe("2");
    expect(slice(text, "/c")).toBeUndefined();
    expect(jsonPositions("").get("")).toEqual({ from: 0, end: 0 });
  });

  it("does not use up the stack on a text without end", () => {
    expect(jsonPositions("[".repeat(1_000_000)).size).toBeGreaterThan(100);
    expect(jsonPositions('{"a":'.repeat(200_000)).has("/a/a")).toBe(true);
  });

  it("finds every value of any JSON, with exactly its text", () => {
    fc.assert(
      fc.property(fc.jsonValue({ maxDepth: 3 }), fc.constantFrom(0, 2), (value, indent) => {
        const text = JSON.stringify(value, null, indent);
        // Reading the text back makes what has no JSON of its own, as −0, what it is there.
        const check = (part: unknown, pointer: string): void => {
          expect(JSON.parse(slice(text, pointer) ?? "")).toEqual(part);
          if (typeof part !== "object" || part === null) return;
          for (const [key, inner] of Object.entries(part)) {
            check(inner, `${pointer}/${key.replaceAll("~", "~0").replaceAll("/", "~1")}`);
          }
        };
        check(JSON.parse(text), "");
      }),
    );
  });
});

describe("nearestSpan", () => {
  it("falls back to what is around", () => {
    const text = '{"fields": [{"at": 5}]}';
    const spans = jsonPositions(text);
    expect(text.slice(nearestSpan(spans, "/fields/0/length").from).startsWith('{"at"')).toBe(true);
    expect(nearestSpan(spans, "/nothing")).toEqual({ from: 0, end: text.length });
  });
});

describe("lineFinder", () => {
  it("counts from 1", () => {
    const lineOf = lineFinder("ab\ncd");
    expect([0, 2, 3, 4].map(lineOf)).toEqual([
      { line: 1, column: 1 },
      { line: 1, column: 3 },
      { line: 2, column: 1 },
      { line: 2, column: 2 },
    ]);
    expect(lineFinder("")(0)).toEqual({ line: 1, column: 1 });
  });
});
