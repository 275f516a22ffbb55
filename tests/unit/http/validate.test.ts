import { describe, expect, it } from "vitest";
import { z } from "zod";
import { AppError } from "@/lib/errors";
import { validate } from "@/lib/http/validate";

const anything = z.unknown();
const problemsOf = (value: unknown, schema: z.ZodType = anything) => {
  try {
    validate(schema, value, "/body");
  } catch (error) {
    if (error instanceof AppError) return { code: error.code, errors: error.details.errors };
    throw error;
  }
  return undefined;
};

describe("validate", () => {
  it("names every wrong field by its JSON pointer", () => {
    const schema = z.object({ name: z.string(), rows: z.array(z.object({ at: z.number() })) });
    const problem = problemsOf({ rows: [{ at: 1 }, { at: "2" }] }, schema);
    expect(problem).toMatchObject({
      code: "request.invalid",
      errors: [{ path: "/body/name" }, { path: "/body/rows/1/at" }],
    });
  });

  it.each([
    ["NUL", "a\0b"],
    ["a high surrogate alone", "a\ud83d"],
    ["a low surrogate alone", "\ude00a"],
  ])("refuses text with %s wherever it stands", (_, text) => {
    expect(problemsOf({ rows: ["fine", { text }] })?.errors).toMatchObject([
      { path: "/body/rows/1/text", code: "not_storable" },
    ]);
    expect(problemsOf({ [text]: 1 })?.errors).toMatchObject([{ path: "/body", code: "not_storable" }]);
  });

  it("takes pairs, other planes and control characters that are text", () => {
    const text = "\ud83d\ude00 ä \t\n";
    expect(validate(anything, { text })).toEqual({ text });
  });

  it("names twenty of a thousand such texts", () => {
    expect(problemsOf(Array.from({ length: 1_000 }, () => "\0"))?.errors).toHaveLength(20);
  });

  it("refuses what is nested a hundred thousand deep without running out of stack", () => {
    const deep = JSON.parse(`${"[".repeat(100_000)}${"]".repeat(100_000)}`);
    expect(problemsOf(deep)?.errors).toEqual([{ path: "/body", code: "too_deep", message: "Is nested too deep." }]);
  });
});
