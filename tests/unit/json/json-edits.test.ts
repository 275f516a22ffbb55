import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { applyEdits, JsonEditor, onOneLine } from "@/lib/domain/json-edits";

const edited = (text: string, edit: (editor: JsonEditor) => ReturnType<JsonEditor["set"]>) =>
  applyEdits(text, edit(new JsonEditor(text)));

const oddly = `{ "fields": [
    { "name": "a",   "at": 1e0 },
    { "name": "b", "at": 2,
        "unit": "°C" }
  ], "order":1 }`;

describe("JsonEditor", () => {
  it("replaces a value and nothing else", () => {
    expect(edited(oddly, (e) => e.set("/fields/0", "at", "16"))).toBe(oddly.replace("1e0", "16"));
    expect(edited(oddly, (e) => e.set("/fields/0", "at", "1e0"))).toBe(oddly);
  });

  it("puts a member behind the one that comes before it in order, in the manner of the object", () => {
    const order = ["name", "at", "type", "unit"];
    expect(edited(oddly, (e) => e.set("/fields/0", "type", '"u8"', order))).toContain('"at": 1e0, "type": "u8" }');
    expect(edited(oddly, (e) => e.set("/fields/1", "name2", "1", order))).toContain(
      '"unit": "°C",\n        "name2": 1 }',
    );
    expect(edited('{"unit": 1}', (e) => e.set("", "name", '"x"', order))).toBe('{"name": "x", "unit": 1}');
    expect(edited("{}", (e) => e.set("", "name", '"x"'))).toBe('{"name": "x"}');
  });

  it("takes members and items out with their comma", () => {
    expect(edited(oddly, (e) => e.remove("/fields/1/unit"))).toContain('{ "name": "b", "at": 2 }');
    expect(edited('{ "a": 1, "b": 2 }', (e) => e.set("", "a", undefined))).toBe('{ "b": 2 }');
    expect(edited("[1, 2, 3]", (e) => e.remove("/0"))).toBe("[2, 3]");
    expect(edited("[1]", (e) => e.remove("/0"))).toBe("[]");
    expect(edited("[1]", (e) => e.remove("/7"))).toBe("[1]");
  });

  it("writes a new item as its neighbours are written", () => {
    expect(edited(oddly, (e) => e.insert("/fields", { name: "c", at: 3 }, 1))).toContain(
      '{ "name": "a",   "at": 1e0 },\n    { "name": "c", "at": 3 },\n    { "name": "b"',
    );
    const wide = JSON.stringify({ list: [{ a: 1 }] }, null, 3);
    expect(edited(wide, (e) => e.insert("/list", { a: 2 }))).toBe(
      JSON.stringify({ list: [{ a: 1 }, { a: 2 }] }, null, 3),
    );
    expect(edited("[]", (e) => e.insert("", { a: 2 }))).toBe('[{ "a": 2 }]');
  });

  it("moves an item and leaves what stands between", () => {
    expect(edited("[ 1,\n 2, 3 ]", (e) => e.move("", 2, 0))).toBe("[ 3,\n 1, 2 ]");
    expect(edited("[1, 2]", (e) => e.move("", 0, 5))).toBe("[1, 2]");
  });

  it("does what the same change of the value does, for any JSON", () => {
    const key = fc.stringMatching(/^[a-c/~"]{1,3}$/);
    const leaf = fc.oneof(fc.integer(), fc.string(), fc.boolean(), fc.constant(null));
    const objects = fc.array(fc.dictionary(key, leaf, { noNullPrototype: true }), { minLength: 1, maxLength: 4 });
    fc.assert(
      fc.property(
        objects,
        key,
        leaf,
        fc.nat(3),
        fc.nat(3),
        fc.constantFrom(0, 2, "one line"),
        (list, name, value, i, j, how) => {
          const text = how === "one line" ? onOneLine(list) : JSON.stringify(list, null, how as number);
          const at = i % list.length;
          const other = j % list.length;
          const read = (edit: (editor: JsonEditor) => ReturnType<JsonEditor["set"]>) => JSON.parse(edited(text, edit));
          const changed = structuredClone(list);
          (changed[at] as Record<string, unknown>)[name] = value;
          expect(read((e) => e.set(`/${at}`, name, JSON.stringify(value)))).toEqual(changed);
          expect(read((e) => e.remove(`/${at}`))).toEqual(list.filter((_, k) => k !== at));
          expect(read((e) => e.insert("", { new: value }, other))).toEqual(
            list.toSpliced(other, 0, { new: value } as never),
          );
          const moved = [...list];
          moved.splice(other, 0, ...moved.splice(at, 1));
          expect(read((e) => e.move("", at, other))).toEqual(moved);
        },
      ),
    );
  });
});
