import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ComparisonIndexer, type IndexedDevice } from "@/lib/domain/comparison/comparison-index";
import { type SerialSelection, selectSerials } from "@/lib/domain/comparison/select-serials";
import { stepHistogram } from "@/lib/domain/comparison/step-histogram";

const integer = (name: string, steps: number) => ({ name, unit: "1/K", from: 0, to: steps * 1e-9, steps });
const float = (name: string, difference: number) => ({ name, unit: "1", from: 1, to: 1 + difference, steps: null });

const devices: IndexedDevice[] = [
  { serial: "A-1", change: "values", fields: [integer("gainTc", -40), integer("crc", 9000)] },
  { serial: "A-2", change: "same", fields: [] },
  { serial: "A-3", change: "added", fields: [{ name: "gainTc", unit: "1/K", from: null, to: 1, steps: null }] },
  { serial: "A-4", change: "values", fields: [integer("gainTc", 10), float("gain", 0.5)] },
  { serial: "A-5", change: "version-only", fields: [integer("crc", -1)] },
  { serial: "B-6", change: "values", fields: [float("gain", -0.25)] },
];

function indexOf(list: readonly IndexedDevice[]) {
  const indexer = new ComparisonIndexer(new Set(["crc"]));
  for (const device of list) indexer.add(device);
  return indexer.finish();
}

const index = indexOf(devices);
const select = (selection: Partial<SerialSelection>) =>
  selectSerials(index, { sort: "serial", descending: false, ...selection }).map((at) => index.serials[at]);

describe("ComparisonIndexer", () => {
  it("counts every serial and keeps those that differ", () => {
    expect(index.counts).toEqual({ added: 1, removed: 0, values: 3, "version-only": 1, same: 1 });
    expect(index.serials).toEqual(["A-1", "A-3", "A-4", "A-5", "B-6"]);
  });

  it("leaves added serials out of what a field did", () => {
    const gainTc = index.fields.find((field) => field.name === "gainTc");
    expect(gainTc).toMatchObject({ devices: 2, hasSteps: true, parameter: true });
    expect([...(gainTc?.steps ?? [])]).toEqual([-40, Number.NaN, 10, Number.NaN, Number.NaN]);
    expect(index.fields.find((field) => field.name === "crc")?.parameter).toBe(false);
  });
});

describe("selectSerials", () => {
  it("keeps the order of serials", () => {
    expect(select({})).toEqual(["A-1", "A-3", "A-4", "A-5", "B-6"]);
    expect(select({ descending: true })).toEqual(["B-6", "A-5", "A-4", "A-3", "A-1"]);
  });

  it("puts the largest step first, whatever field it is in and whatever its sign, and no checksum", () => {
    // each have the largest of a parameter; B-6 half of the largest gain; A-5 only a checksum; A-3 no step
    expect(select({ sort: "largest", descending: true })).toEqual(["A-1", "A-4", "B-6", "A-5", "A-3"]);
  });

  it("orders by a field with its sign, what lacks it last in both directions", () => {
    expect(select({ sort: "gainTc" })).toEqual(["A-1", "A-4", "A-3", "A-5", "B-6"]);
    expect(select({ sort: "gainTc", descending: true })).toEqual(["A-4", "A-1", "A-3", "A-5", "B-6"]);
    expect(select({ sort: "no-such" })).toEqual(select({}));
  });

  it("filters by change, part of a serial, field, and least step", () => {
    expect(select({ change: "values" })).toEqual(["A-1", "A-4", "B-6"]);
    expect(select({ search: "b-" })).toEqual(["B-6"]);
    expect(select({ field: "gainTc" })).toEqual(["A-1", "A-4"]);
    expect(select({ field: "gainTc", least: 40 })).toEqual(["A-1"]);
    expect(select({ field: "gainTc", least: 41 })).toEqual([]);
    expect(select({ field: "gain", least: 0.3 })).toEqual(["A-4"]);
    expect(select({ field: "no-such" })).toEqual([]);
  });
});

describe("stepHistogram", () => {
  const histogramOf = (steps: readonly number[]) => {
    const list = steps.map((step, i): IndexedDevice => {
      return { serial: String(i).padStart(6, "0"), change: "values", fields: [integer("f", step)] };
    });
    const [field] = indexOf(list).fields;
    return field && stepHistogram(field);
  };

  it("gives each whole step its own bin where there are few", () => {
    expect(histogramOf([-1, -1, 0, 2])).toEqual({ in: "steps", from: -1.5, width: 1, counts: [2, 1, 0, 1] });
    expect(histogramOf([7, 7])).toEqual({ in: "steps", from: 6.5, width: 1, counts: [2] });
  });

  it("is in the unit where there are no steps, and null where there is no number", () => {
    const gain = index.fields.find((field) => field.name === "gain");
    const found = gain && stepHistogram(gain);
    expect(found).toMatchObject({ in: "unit", from: -0.25 });
    expect(found?.counts).toHaveLength(31);
    expect([found?.counts[0], found?.counts[30]]).toEqual([1, 1]);
    const [text] = indexOf([
      { serial: "1", change: "values", fields: [{ name: "t", unit: null, from: "a", to: "b", steps: null }] },
    ]).fields;
    expect(text && stepHistogram(text)).toBeNull();
  });

  it("counts every difference once, in a bin that holds it", () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -9_000_000, max: 9_000_000 }), { minLength: 1, maxLength: 60 }),
        (steps) => {
          const found = histogramOf(steps);
          if (!found) throw new Error("no histogram");
          const { from, width, counts } = found;
          expect(counts.length).toBeLessThanOrEqual(31);
          const expected = counts.map((_, bin) => {
            const [low, high] = [from + bin * width, from + (bin + 1) * width];
            return steps.filter((step) => step >= low && step < high).length;
          });
          expect(counts).toEqual(expected);
        },
      ),
    );
  });
});
