import { describe, expect, it } from "vitest";
import { joinShape, type LintOptions, lintLayout } from "@/builders/codec/lint/lint";
import { findMends } from "@/builders/codec/mend/find-mend";
import { applyEdits } from "@/lib/domain/json-edits";
import type { Problem } from "@/lib/errors";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";
import { firstGolden, secondGolden } from "../../support/scenario/golden";
import { oneFieldLayout, smallLayout } from "./layouts";

const family = {
  code: "LC-1",
  referenceC: 20,
  capacityKg: 20,
  nominalMvV: 2,
  vMinRatioY: 10_000,
  temperatureMinC: 10,
  temperatureMaxC: 40,
};

/** The small layout with one of its fields changed, by name. */
function withField(name: string, change: Partial<LayoutField>): LayoutDocument {
  const { fields } = smallLayout();
  return smallLayout({ fields: fields.map((field) => (field.name === name ? { ...field, ...change } : field)) });
}

const plus = (...fields: LayoutField[]) => smallLayout({ fields: [...smallLayout().fields, ...fields] });
const constant = (name: string, at: number, more: Partial<LayoutField> = {}): LayoutField => ({
  name,
  at,
  type: "u8",
  value: { const: 1 },
  ...more,
});
const sums = (...checksums: LayoutDocument["checksums"]) => smallLayout({ checksums });
const crc = (name: string, at: number, over: [number, number]) => ({ name, at, algorithm: "CRC-16/MODBUS", over });
const published = (version: string, change: Partial<LayoutDocument> = {}): LintOptions => ({
  publishedVersions: [smallLayout({ version, ...change })],
});

interface Case {
  what: string;
  document: unknown;
  options?: LintOptions;
  level: "errors" | "warnings";
  path: string;
  code: string;
  /** Label of the one-click mend; left out where only the author knows what is meant. */
  mend?: string;
}

const cases: Case[] = [
  {
    what: "an overlap",
    document: plus(constant("late", 41)),
    level: "errors",
    path: "/fields/8",
    code: "field.overlap",
    mend: "Move “late” to 42",
  },
  {
    what: "a field beyond the memory",
    document: plus(constant("late", 64)),
    level: "errors",
    path: "/fields/8",
    code: "field.outside_memory",
    mend: "Move “late” to 12",
  },
  {
    what: "no room at all",
    document: oneFieldLayout({ type: "ascii", length: 30, at: 20, value: { const: "A" } }),
    level: "errors",
    path: "/fields/0",
    code: "field.outside_memory",
    mend: "Move “one” to 0",
  },
  {
    what: "a number across a page",
    document: plus(constant("wide", 46, { type: "u32" })),
    level: "warnings",
    path: "/fields/8/at",
    code: "field.page_crossing",
    mend: "Move “wide” to 48",
  },
  {
    what: "a number off its multiple",
    document: plus(constant("wide", 49, { type: "u32" })),
    level: "warnings",
    path: "/fields/8/at",
    code: "field.unaligned",
    mend: "Move “wide” to 52",
  },
  {
    what: "a 24-bit word at an odd address",
    document: plus(constant("word", 49, { type: "i24" })),
    level: "warnings",
    path: "/fields/8/at",
    code: "field.unaligned",
    mend: "Move “word” to 50",
  },
  {
    what: "a name used twice",
    document: plus(constant("zero", 48)),
    level: "errors",
    path: "/fields/8/name",
    code: "field.duplicate_name",
    mend: "Call it “zero2”",
  },
  {
    what: "an unknown source",
    document: withField("zeroTc", { value: { from: "coefficients.zerotk" as never } }),
    level: "errors",
    path: "/fields/4/value/from",
    code: "field.unknown_source",
    mend: "Take coefficients.zeroTc",
  },
  {
    what: "a source of text in a number",
    document: withField("version", { value: { from: "lot.code" } }),
    level: "errors",
    path: "/fields/7/value/from",
    code: "field.source_type",
  },
  {
    what: "a type too narrow for its limits",
    document: plus(constant("narrow", 48, { max: 300 })),
    level: "errors",
    path: "/fields/8/max",
    code: "field.type_too_narrow",
    mend: "Make it u16",
  },
  {
    what: "a scale too fine for the limits",
    document: withField("gainTc", { scale: 1e-15, min: -0.002, max: 0.002 }),
    level: "errors",
    path: "/fields/6/min",
    code: "field.type_too_narrow",
  },
  {
    what: "a scale coarser than the cell resolves",
    document: withField("gainTc", { scale: 1e-5, min: -0.002, max: 0.002 }),
    options: { family },
    level: "warnings",
    path: "/fields/6/scale",
    code: "field.scale_coarse",
    mend: "Set the scale to 1e-7",
  },
  {
    what: "a scale of 0",
    document: withField("gainTc", { scale: 0 }),
    level: "errors",
    path: "/fields/6/scale",
    code: "field.scale_zero",
    mend: "Take “scale” out",
  },
  {
    what: "a scale of a float",
    document: withField("gain", { scale: 2 }),
    level: "errors",
    path: "/fields/5/scale",
    code: "field.scale_not_allowed",
    mend: "Take “scale” out",
  },
  {
    what: "limits the wrong way round",
    document: withField("gain", { min: 2, max: 1 }),
    level: "errors",
    path: "/fields/5/min",
    code: "field.limits_inverted",
    mend: "Swap the limits",
  },
  {
    what: "limits of a text",
    document: withField("serial", { max: 1 }),
    level: "errors",
    path: "/fields/0/max",
    code: "field.limits_not_allowed",
    mend: "Take “max” out",
  },
  {
    what: "a length of a number",
    document: withField("gain", { length: 4 }),
    level: "errors",
    path: "/fields/5/length",
    code: "field.length_not_allowed",
    mend: "Take “length” out",
  },
  {
    what: "a text without a length",
    document: withField("serial", { length: undefined }),
    level: "errors",
    path: "/fields/0/length",
    code: "field.length_missing",
    mend: "Make it 16 bytes",
  },
  {
    what: "a constant beyond its type",
    document: plus(constant("much", 48, { value: { const: 256 } })),
    level: "errors",
    path: "/fields/8/value/const",
    code: "field.const_out_of_range",
    mend: "Make it u16",
  },
  {
    what: "a constant outside its limits",
    document: plus(constant("much", 48, { min: 2, max: 3 })),
    level: "errors",
    path: "/fields/8/value/const",
    code: "field.const_outside_limits",
  },
  {
    what: "a constant of another type",
    document: plus(constant("much", 48, { value: { const: "1" } })),
    level: "errors",
    path: "/fields/8/value/const",
    code: "field.const_type",
  },
  {
    what: "a serial longer than its field",
    document: smallLayout(),
    options: { existingSerialLengthMax: 15 },
    level: "warnings",
    path: "/fields/0/length",
    code: "field.serial_too_short",
    mend: "Make it 15 bytes",
  },
  {
    what: "no serial",
    document: smallLayout({ fields: smallLayout().fields.slice(1) }),
    level: "warnings",
    path: "/fields",
    code: "layout.serial_missing",
    mend: "Add “serial” at 0",
  },
  {
    what: "a coefficient without a field",
    document: smallLayout({ fields: smallLayout().fields.filter((one) => one.name !== "zero") }),
    level: "errors",
    path: "/fields",
    code: "layout.coefficient_missing",
    mend: "Add “zero” at 12",
  },
  {
    what: "a coefficient of a higher order",
    document: plus(constant("zeroTc2", 48, { type: "f32", value: { from: "coefficients.zeroTc2" } })),
    level: "errors",
    path: "/fields/8/value/from",
    code: "field.order_exceeded",
    mend: "Take “zeroTc2” out",
  },
  {
    what: "a known value beyond its field",
    document: smallLayout({
      version: "300.0.0",
      fields: [...smallLayout().fields, constant("major", 48, { value: { from: "layout.major" } })],
    }),
    level: "errors",
    path: "/fields/8",
    code: "field.value_out_of_range",
  },
  {
    what: "a checksum that covers itself",
    document: sums(crc("sum", 62, [0, 63])),
    level: "errors",
    path: "/checksums/0/over",
    code: "checksum.covers_itself",
    mend: "Cover 0 to 61",
  },
  {
    what: "a checksum over what is kept",
    document: smallLayout({ kept: [[44, 47]] }),
    level: "errors",
    path: "/checksums/0/over",
    code: "checksum.over_kept",
    mend: "Cover 0 to 43",
  },
  {
    what: "a checksum lying on what is kept",
    document: smallLayout({ kept: [[60, 63]], checksums: [crc("sum", 62, [0, 57])] }),
    level: "errors",
    path: "/checksums/0",
    code: "checksum.over_kept",
    mend: "Move “sum” to 58",
  },
  {
    what: "a checksum beyond the memory",
    document: sums(crc("sum", 62, [0, 70])),
    level: "errors",
    path: "/checksums/0/over",
    code: "checksum.range_outside_memory",
    mend: "Cover 0 to 61",
  },
  {
    what: "a range that ends before it starts",
    document: sums(crc("sum", 62, [61, 0])),
    level: "errors",
    path: "/checksums/0/over",
    code: "checksum.range_invalid",
    mend: "Swap its ends",
  },
  {
    what: "a kept range that ends before it starts",
    document: smallLayout({ kept: [[61, 60]], checksums: [crc("sum", 62, [0, 41])] }),
    level: "errors",
    path: "/kept/0",
    code: "kept.range_invalid",
    mend: "Swap its ends",
  },
  {
    what: "a field that no checksum covers",
    document: sums(crc("sum", 62, [0, 39])),
    level: "warnings",
    path: "/fields/7",
    code: "field.not_covered",
    mend: "Let “sum” cover 0 to 41",
  },
  {
    what: "no checksum",
    document: sums(),
    level: "warnings",
    path: "/checksums",
    code: "layout.checksum_missing",
    mend: "Add “imageCrc” at 62",
  },
  {
    what: "a checksum over a later one",
    document: sums(crc("all", 62, [0, 61]), crc("head", 60, [0, 59])),
    level: "errors",
    path: "/checksums/0/over",
    code: "checksum.covers_later",
    mend: "Compute “head” first",
  },
  {
    what: "an algorithm that is not in the catalogue",
    document: sums({ ...crc("sum", 62, [0, 61]), algorithm: "CRC-16/NONE" }),
    level: "errors",
    path: "/checksums/0/algorithm",
    code: "checksum.unknown_algorithm",
  },
  {
    what: "two versions for one firmware",
    document: smallLayout({ version: "1.1.0" }),
    options: published("1.0.0"),
    level: "warnings",
    path: "/firmware",
    code: "firmware.shared",
  },
  {
    what: "an empty firmware range",
    document: smallLayout({ firmware: ">2.0.0 <1.0.0" }),
    level: "errors",
    path: "/firmware",
    code: "firmware.range_empty",
  },
  {
    what: "a firmware range that is none",
    document: smallLayout({ firmware: "newest" }),
    level: "errors",
    path: "/firmware",
    code: "firmware.range_invalid",
  },
  {
    what: "a step too small",
    document: { ...withField("gain", { at: 48 }), version: "1.0.1" },
    options: published("1.0.0"),
    level: "errors",
    path: "/version",
    code: "layout.step_too_small",
    mend: "Make it 2.0.0",
  },
  {
    what: "a version that is taken",
    document: smallLayout(),
    options: published("1.0.0"),
    level: "errors",
    path: "/version",
    code: "layout.version_taken",
    mend: "Make it 1.0.1",
  },
  {
    what: "another version than the draft's",
    document: smallLayout({ version: "1.1.0" }),
    options: { draftVersion: "1.0.0" },
    level: "errors",
    path: "/version",
    code: "layout.version_differs",
    mend: "Make it 1.0.0",
  },
  {
    what: "another family",
    document: smallLayout({ family: "OTHER" }),
    options: { family },
    level: "errors",
    path: "/family",
    code: "layout.family_mismatch",
    mend: "Make it for LC-1",
  },
  {
    what: "a memory beyond the address space",
    document: smallLayout({ memory: { ...smallLayout().memory, baseAddress: 2 ** 32 - 1 } }),
    level: "errors",
    path: "/memory/baseAddress",
    code: "memory.beyond_address_space",
  },
  {
    what: "a field without a name",
    document: { ...smallLayout(), fields: [...smallLayout().fields, { at: 1 }] },
    level: "errors",
    path: "/fields/8",
    code: "layout.shape",
  },
];

describe("lintLayout", () => {
  it("finds nothing in the small layout, and no error in the golden ones", () => {
    expect(lintLayout(smallLayout(), { family })).toEqual({ errors: [], warnings: [], step: null });
    for (const { layout } of [firstGolden(), secondGolden()]) expect(lintLayout(JSON.parse(layout)).errors).toEqual([]);
  });

  it("says in words that a 24-bit word of the golden layout starts at an odd address", () => {
    const { warnings } = lintLayout(JSON.parse(firstGolden().layout), { family: { ...family, code: "MW-20" } });
    expect(warnings.map(({ message }) => message)).toContain(
      "“zeroTc” starts at an odd address, 0x0033; fine for firmware that reads bytes",
    );
  });

  it.each(cases)("finds $what: $code", ({ document, options, level, path, code }) => {
    const found = lintLayout(document, options)[level].find((one) => one.code === code && one.path === path);
    expect(found?.message.length).toBeGreaterThan(10);
  });

  it("bears half-written documents of any shape", () => {
    for (const document of [null, 3, [], {}, { ...smallLayout(), fields: [null, 4, {}] }, { memory: {}, fields: {} }]) {
      expect(lintLayout(document).errors.length).toBeGreaterThan(0);
    }
  });
});

const findMend = (problem: Problem, text: string, options?: LintOptions) =>
  findMends([problem], text, options).get(problem);

describe("joinShape", () => {
  it("says each thing once, and keeps what is missing in an empty list", () => {
    const shape = [
      { path: "/version", code: "layout.shape", message: "must match pattern" },
      { path: "/fields", code: "layout.shape", message: "needs at least 1" },
    ];
    const { errors } = joinShape(shape, lintLayout(smallLayout({ version: "1", fields: [] })));
    expect(errors.filter((error) => error.path === "/version")).toEqual([shape[0]]);
    expect(errors.filter((error) => error.code === "layout.coefficient_missing")).toHaveLength(6);
  });
});

describe("findMends", () => {
  it.each(cases.filter((one) => one.mend !== undefined))(
    "$mend, against $what",
    ({ document, options, level, path, code, mend }) => {
      const text = JSON.stringify(document, null, 1);
      const before = lintLayout(document, options);
      const problem = before[level].find((one) => one.code === code && one.path === path);
      const found = problem && findMend(problem, text, options);
      expect(found?.label).toBe(mend);
      const after = lintLayout(JSON.parse(applyEdits(text, found?.edits ?? [])), options);
      expect(after[level].map((one) => one.code + one.path)).not.toContain(code + path);
      // A mend never trades one error for others.
      expect(after.errors.length).toBeLessThanOrEqual(Math.max(before.errors.length - (level === "errors" ? 1 : 0), 0));
    },
  );

  it.each(cases.filter((one) => one.mend === undefined))(
    "leaves $what to the author",
    ({ document, options, level, path, code }) => {
      const problem = lintLayout(document, options)[level].find((one) => one.code === code && one.path === path);
      expect(problem && findMend(problem, JSON.stringify(document), options)).toBeUndefined();
    },
  );

  it("takes out what the schema does not know", () => {
    const text = JSON.stringify({ ...smallLayout(), colour: "red" });
    const problem = { path: "/colour", code: "layout.shape", message: "“colour” is not known here" };
    expect(applyEdits(text, findMend(problem, text)?.edits ?? [])).toBe(JSON.stringify(smallLayout()));
  });

  it("has nothing for a text that is not JSON", () => {
    expect(findMend({ path: "/fields/0", code: "field.overlap", message: "" }, "{")).toBeUndefined();
  });
});
