import { describe, expect, it } from "vitest";
import { compareDrafts, mergeDrafts } from "@/app/(site)/families/[family]/layouts/draft/merge-drafts";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { smallLayout } from "../builders/layouts";

const text = (change: (layout: LayoutDocument) => void = () => undefined) => {
  const layout = structuredClone(smallLayout());
  change(layout);
  return JSON.stringify(layout, null, 2);
};
const field = (layout: LayoutDocument, name: string) =>
  layout.fields.find((one) => one.name === name) as LayoutDocument["fields"][number];
const base = text();
const mine = text((layout) => {
  field(layout, "zero").min = -0.5;
  layout.fields.push({ name: "spare", at: 44, type: "u8", value: { const: 1 } });
  layout.memory.fill = 0;
});
const theirs = text((layout) => {
  field(layout, "gain").max = 1.2;
  field(layout, "zero").min = -0.4;
  layout.description = "theirs";
  layout.fields = layout.fields.filter((one) => one.name !== "version");
});
const compared = compareDrafts(base, mine, theirs) ?? [];

describe("compareDrafts", () => {
  it("tells whose change each difference is", () => {
    expect(compared.map(({ key, changedBy }) => [key, changedBy])).toEqual([
      ["description", "them"],
      ["memory/fill", "me"],
      ["fields/zero/min", "both"],
      ["fields/gain/max", "them"],
      ["fields/version", "them"],
      ["fields/spare", "me"],
    ]);
    expect(compared[2]).toMatchObject({ where: "“zero”, min", mine: "-0.5", theirs: "-0.4" });
  });

  it("takes both as changed where the beginning is not known", () => {
    expect(compareDrafts(null, mine, theirs)?.every((one) => one.changedBy === "both")).toBe(true);
  });

  it("has nothing to compare where one text is half-written", () => {
    expect(compareDrafts(base, "{", theirs)).toBeNull();
    expect(compareDrafts(base, mine, "[]")).toBeNull();
    expect(compareDrafts(base, mine, mine)).toEqual([]);
  });
});

describe("mergeDrafts", () => {
  const read = (merged: string) => JSON.parse(merged) as LayoutDocument;

  it("puts the two together place by place", () => {
    const keys = compared.filter((one) => one.changedBy === "them").map((one) => one.key);
    const merged = read(mergeDrafts(mine, compared, new Set(keys)));
    expect(field(merged, "gain").max).toBe(1.2);
    expect(field(merged, "zero").min).toBe(-0.5);
    expect(merged.description).toBe("theirs");
    expect(merged.fields.map((one) => one.name)).not.toContain("version");
    expect(merged.fields.map((one) => one.name)).toContain("spare");
    expect(merged.memory.fill).toBe(0);
  });

  it("is mine with nothing chosen, and says what theirs says with all", () => {
    expect(mergeDrafts(mine, compared, new Set())).toBe(mine);
    expect(read(mergeDrafts(mine, compared, new Set(compared.map((one) => one.key))))).toEqual(JSON.parse(theirs));
  });

  it("puts a part that only they have where they have it", () => {
    const added = text((layout) =>
      layout.fields.splice(2, 0, { name: "mark", at: 44, type: "u8", value: { const: 9 } }),
    );
    const differences = compareDrafts(base, base, added) ?? [];
    expect(mergeDrafts(base, differences, new Set(["fields/mark"]))).toBe(added);
  });
});
