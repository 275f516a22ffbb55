import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import layoutSchema from "@/schemas/documents/layout.schema.json";
import { shapeProblems } from "@/schemas/documents/layout-shape";
import { layoutValidatorSource, schemaCompiler } from "@/schemas/documents/validator-source";
import { firstGolden, secondGolden } from "../../support/scenario/golden";
import { smallLayout } from "../builders/layouts";

// JSON Schema 2020-12, its own metaschema as ajv ships it.
describe("the layout schema", () => {
  it("is a schema of 2020-12, and nothing in it is unknown to a strict compiler", () => {
    const ajv = schemaCompiler();
    expect(layoutSchema.$schema).toBe("https://json-schema.org/draft/2020-12/schema");
    expect([ajv.validateSchema(layoutSchema), ajv.errors]).toEqual([true, null]);
    expect(() => ajv.compile(layoutSchema)).not.toThrow();
    expect(() => schemaCompiler().compile({ ...layoutSchema, gloss: 1 })).toThrow(/gloss/);
  });

  it("has a description for everything that an author can write", () => {
    const bare: string[] = [];
    const walk = (schema: unknown, path: string): void => {
      if (typeof schema !== "object" || schema === null) return;
      const { properties = {}, $defs = {} } = schema as { properties?: object; $defs?: object };
      for (const [name, one] of Object.entries(properties)) {
        const said = "description" in one || "$ref" in one;
        if (!said) bare.push(`${path}/${name}`);
        walk(one, `${path}/${name}`);
      }
      for (const [name, one] of Object.entries($defs)) walk(one, `#${name}`);
    };
    walk(layoutSchema, "");
    expect(bare).toEqual([]);
  });

  it("is what the validator was made from; if not, run npm run codegen", () => {
    const stored = readFileSync(
      join(import.meta.dirname, "../../../schemas/documents/layout-validator.generated.ts"),
      "utf8",
    );
    expect(stored === layoutValidatorSource()).toBe(true);
  });
});

describe("shapeProblems", () => {
  it("takes the golden layouts and a small one", () => {
    for (const { layout } of [firstGolden(), secondGolden()]) expect(shapeProblems(JSON.parse(layout))).toEqual([]);
    expect(shapeProblems(smallLayout())).toEqual([]);
  });

  it("names what is unknown, missing or of another kind, with its place", () => {
    const { memory, ...rest } = smallLayout();
    const wrong = {
      ...rest,
      colour: "red",
      order: 3,
      fields: [{ name: "9", at: -1, type: "u7", value: { from: "nowhere" } }],
    };
    const found = shapeProblems(wrong).map(({ path, message }) => `${path} ${message}`);
    expect(found).toContain("/colour “colour” is not known here");
    expect(found).toContain("/memory “memory” is missing");
    expect(found).toContain("/order must be one of 1, 2");
    expect(found.some((one) => one.startsWith("/fields/0/at must be >= 0"))).toBe(true);
    expect(found.some((one) => one.startsWith("/fields/0/type must be one of u8"))).toBe(true);
    expect(memory.bytes).toBe(64);
  });

  it("bears anything", () => {
    for (const json of [null, [], 3, "x", {}, { fields: null }]) expect(shapeProblems(json).length).toBeGreaterThan(0);
  });
});
