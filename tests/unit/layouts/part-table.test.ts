import { describe, expect, it } from "vitest";
import { readImport } from "@/app/(site)/families/[family]/layouts/draft/read-import";
import { fieldColumns } from "@/app/(site)/families/[family]/layouts/table/columns";
import { deedOf, within } from "@/app/(site)/families/[family]/layouts/table/grid-keys";
import {
  algorithmMember,
  numberMember,
  numberText,
  rangesMember,
  valueMember,
} from "@/app/(site)/families/[family]/layouts/table/write-member";
import { applyEdits, JsonEditor } from "@/lib/domain/json-edits";
import type { LayoutField } from "@/schemas/documents/layout";

const text = '{"fields": [{ "name": "zero",  "at": 4, "type": "i24", "value": { "from": "coefficients.zero" } }]}';

/** The field after a cell of it was written. */
function written(kind: { write: typeof valueMember.write }, entry: string, source = text): string {
  const editor = new JsonEditor(source);
  const path = "/fields/0";
  const result = kind.write({ editor, path, part: JSON.parse(editor.raw(path) ?? "{}") }, entry);
  return "refusal" in result ? result.refusal : (new JsonEditor(applyEdits(source, result.edits)).raw(path) ?? "");
}

describe("cells of the field table", () => {
  it("keep a number as it is typed, and understand a true minus sign", () => {
    expect(["1e-6", "−0.5", "+3", "0x10", ".5", "07"].map(numberText)).toEqual(["1e-6", "-0.5", "3", "16", "0.5", "7"]);
    expect(["", "abc", "1,5", "Infinity"].map(numberText)).toEqual([undefined, undefined, undefined, undefined]);
    expect(written(numberMember("scale"), "1e-6")).toBe(
      '{ "name": "zero",  "at": 4, "type": "i24", "scale": 1e-6, "value": { "from": "coefficients.zero" } }',
    );
    expect(written(numberMember("at", true), "")).toContain("can't be empty");
    expect(written(numberMember("at"), "here")).toBe("“here” is not a number.");
  });

  it("write a source or, behind an equals sign, a constant", () => {
    expect(written(valueMember, "coefficients.gain")).toContain('"value": { "from": "coefficients.gain" }');
    expect(written(valueMember, "= 5")).toContain('"value": { "const": 5 }');
    expect(written(valueMember, "=A5", text.replace("i24", "bytes"))).toContain('"value": { "const": "A5" }');
    expect(written(valueMember, "nowhere")).toBe("“nowhere” is no source; a constant begins with =.");
    expect(valueMember.read({ value: { bits: [] } })).toBeNull();
    expect(valueMember.read({ value: { const: [1, 2] } })).toBeNull();
  });

  it("tell in words what only the text can change", () => {
    expect(valueMember.tell?.({ value: { const: [-1, 2] } })).toBe("= \u22121, 2");
    expect(valueMember.tell?.({ value: { bits: [{ name: "mode" }, null, {}] } })).toBe("bits: mode, …, …");
    const sum = { algorithm: { sum: 16, complement: "ones" } };
    expect([algorithmMember.read(sum), algorithmMember.tell?.(sum)]).toEqual([
      null,
      "sum of bytes, 16 bits, ones' complement",
    ]);
    expect([algorithmMember.read({ algorithm: "CRC-16/ARC" }), algorithmMember.tell?.({ algorithm: null })]).toEqual([
      "CRC-16/ARC",
      "…",
    ]);
  });

  it("write one range or several", () => {
    const sum = '{"fields": [{ "over": [0, 1] }]}';
    expect(written(rangesMember, "0-39", sum)).toBe('{ "over": [0, 39] }');
    expect(written(rangesMember, "0–39, 52 to 71", sum)).toBe('{ "over": [[0, 39], [52, 71]] }');
    expect(written(rangesMember, "all", sum)).toContain("first and last offset");
    expect(
      rangesMember.read({
        over: [
          [0, 39],
          [52, 71],
        ],
      }),
    ).toBe("0–39, 52–71");
  });

  it("have a column for what the fields have besides", () => {
    const names = (fields: object[]) => fieldColumns(fields as LayoutField[]).map((column) => column.name);
    expect(names([{ type: "u8" }])).not.toContain("fraction");
    expect(names([{ type: "fixed" }])).toEqual(expect.arrayContaining(["bits", "fraction", "signed"]));
    expect(names([{ type: "u8", count: 3 }])).toContain("count");
    for (const column of fieldColumns([])) expect(column.hint.length).toBeGreaterThan(10);
  });
});

describe("keys of the table", () => {
  const size = { rows: 3, columns: 4 };
  const press = (key: string, held: object = {}) =>
    deedOf(
      { key, ctrlKey: false, metaKey: false, altKey: false, shiftKey: false, ...held },
      { row: 1, column: 1 },
      size,
    );

  it("walk, write, and change rows", () => {
    expect(press("ArrowDown")).toEqual({ do: "go", to: { row: 2, column: 1 } });
    expect(press("End")).toEqual({ do: "go", to: { row: 1, column: 3 } });
    expect(press("End", { ctrlKey: true })).toEqual({ do: "go", to: { row: 2, column: 3 } });
    expect(press("Enter")).toEqual({ do: "write" });
    expect(press("7")).toEqual({ do: "write", entry: "7" });
    expect(press("ArrowUp", { altKey: true })).toEqual({ do: "move", by: -1 });
    expect(press("Delete", { ctrlKey: true })).toEqual({ do: "remove" });
    expect(press("z", { metaKey: true })).toEqual({ do: "undo" });
  });

  it("leave the browser its own", () => {
    expect([press("Tab"), press("Escape"), press("c", { ctrlKey: true }), press("F5")]).toEqual([
      undefined,
      undefined,
      undefined,
      undefined,
    ]);
    expect(within({ row: 9, column: -1 }, size)).toEqual({ row: 2, column: 0 });
    expect(within({ row: 0, column: 0 }, { rows: 0, columns: 4 })).toEqual({ row: 0, column: 0 });
  });
});

describe("readImport", () => {
  const read = (content: string | Uint8Array) =>
    readImport(typeof content === "string" ? new TextEncoder().encode(content) : content);
  const layout = '{"format": "trimwright/layout@1",   "fields": []}';

  it("takes a layout's text as it is, also behind a byte order mark", () => {
    expect(read(layout)).toEqual({ text: layout });
    expect(read(`\ufeff${layout}`)).toEqual({ text: layout });
  });

  it.each([
    ["another kind of file", new Uint8Array([0x50, 0x4b, 0x03, 0x04, 0xff]), /UTF-8/],
    ["no JSON", "<layout/>", /not JSON/],
    ["a list", "[1, 2]", /no layout/],
    ["another format", '{"format": "else"}', /does not name the format/],
    ["NUL characters", `{"format":"\0"}`, /NUL/],
    ["nesting without end", `${"[".repeat(100_000)}`, /not JSON/],
    ["deep nesting", `{"format": "trimwright/layout@1", "a": ${"[".repeat(50)}${"]".repeat(50)}}`, /nested/],
    ["too many bytes", new Uint8Array(1024 * 1024 + 1), /at most 1 MiB/],
    ["an empty file", "", /not JSON/],
  ])("refuses %s in words", (_what, content, words) => {
    const result = read(content);
    expect("refusal" in result && result.refusal).toMatch(words);
  });
});
