import { describe, expect, it } from "vitest";
import { continuedText, templates, templateText } from "@/app/(site)/families/[family]/layouts/templates";
import { compileLayout } from "@/builders/codec/compile-layout";
import { decodeImage, encodeImage } from "@/builders/codec/image";
import { lintLayout } from "@/builders/codec/lint/lint";
import { sampleSources } from "@/builders/codec/sample";
import { shapeProblems } from "@/schemas/documents/layout-shape";

const family = {
  code: "LC-1",
  referenceC: 20,
  capacityKg: 20,
  nominalMvV: 2,
  vMinRatioY: 10_000,
  temperatureMinC: -10,
  temperatureMaxC: 40,
};

describe("templates", () => {
  const filled = templates.filter((template) => template.id !== "empty");

  it.each(filled)("$name: is free of findings and can be encoded as it stands", (template) => {
    const document = JSON.parse(templateText(template, "LC-1"));
    expect(document).toEqual(template.make("LC-1"));
    expect(shapeProblems(document)).toEqual([]);
    expect(lintLayout(document, { family, existingSerialLengthMax: 20 })).toEqual({
      errors: [],
      warnings: [],
      step: null,
    });
    const compiled = compileLayout(document);
    const sources = sampleSources(document, family);
    const decoded = decodeImage(compiled, encodeImage(compiled, sources));
    const zeroTc = decoded.find((field) => field.name === "zeroTc")?.value as number;
    expect(Math.abs(zeroTc - sources.coefficients.zeroTc)).toBeLessThan(1e-9);
  });

  it("has an empty one that names nothing but what is missing", () => {
    const document = JSON.parse(templateText(templates.at(-1) as (typeof templates)[number], "LC-1"));
    const codes = new Set(lintLayout(document, { family }).errors.map((error) => error.code));
    expect([...codes]).toEqual(["layout.coefficient_missing"]);
  });
});

describe("continuedText", () => {
  it("changes the version alone, to the first free minor one", () => {
    const source = '{ "version":  "1.2.3",\n "order": 1 }';
    expect(continuedText(source, "1.2.3", ["1.2.3", "1.3.0"])).toBe('{ "version":  "1.4.0",\n "order": 1 }');
    expect(continuedText("not JSON", "1.2.3", [])).toBe("not JSON");
  });
});
