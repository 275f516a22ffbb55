import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { templates, templateText } from "@/app/(site)/families/[family]/layouts/templates";
import { setOut } from "@/lib/domain/json-set-out";

describe("setOut", () => {
  it("sets a compact layout out as the editor's own templates are", () => {
    for (const template of templates) {
      const text = templateText(template, "LC-1");
      expect(setOut(JSON.stringify(JSON.parse(text)))).toBe(text);
    }
  });

  it("leaves what is set out already, and what is not JSON", () => {
    for (const text of ['{ "a":\n1 }', '{"a":', "", "{\r\n}"]) expect(setOut(text)).toBe(text);
  });

  it("takes a line break at the very end for none", () => {
    expect(setOut('{"a":1,"b":[{"c":2}]}\n')).toBe('{\n  "a": 1,\n  "b": [\n    { "c": 2 }\n  ]\n}\n');
  });

  it("keeps numbers and texts as written, and both of a member named twice", () => {
    expect(setOut('{"a":18446744073709551615,"b":1.50,"a":"\\u00b0{,}: \\""}')).toBe(
      '{\n  "a": 18446744073709551615,\n  "b": 1.50,\n  "a": "\\u00b0{,}: \\""\n}\n',
    );
  });

  it("never changes what the text says, for any JSON, and is done at once", () => {
    fc.assert(
      fc.property(fc.json(), (json) => {
        const once = setOut(json);
        expect(JSON.parse(once)).toEqual(JSON.parse(json));
        expect(setOut(once)).toBe(once);
      }),
    );
  });
});
