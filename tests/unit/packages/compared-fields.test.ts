import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { columnsOfField, rowOfChange } from "@/app/_components/difference/changed-device";
import { changedParameters, comparedFields } from "@/app/_components/difference/compared-fields";
import { csvOf } from "@/app/_components/table/csv";
import type { LayoutDocument } from "@/schemas/documents/layout";

const golden = new URL("../../fixtures/golden/layout.json", import.meta.url);
const layout = JSON.parse(readFileSync(golden, "utf8")) as LayoutDocument;
const summary = (name: string, unit: string | null, stepsMin: number | null, stepsMax = stepsMin) => ({
  name,
  unit,
  devices: 28,
  stepsMin,
  stepsMax,
});
const changed = [
  summary("packageMinor", null, 1),
  summary("gain", "1", -216, 1431),
  summary("gainTc", "1/K", -160_000),
  summary("tempOffset", "°C", null),
  summary("imageCrc", null, null),
];

describe("the parameters of a comparison", () => {
  it("are no version numbers and no checksums", () => {
    expect(changedParameters(changed, layout).map((field) => field.name)).toEqual(["gain", "gainTc", "tempOffset"]);
  });

  it("have the size of a step where they are stored as integers", () => {
    const scales = changedParameters(changed, layout).map((field) => field.scale);
    expect(scales).toEqual([2.3283064365386963e-10, 1e-12, null]);
  });

  it("get their columns first, everything else on demand", () => {
    const fields = comparedFields(changed, layout);
    expect(fields.filter((field) => field.shown).map((field) => field.name)).toEqual(["gain", "gainTc", "tempOffset"]);
    expect(fields.map((field) => field.name)).toContain("zeroTc");
    expect(fields.find((field) => field.name === "gain")?.least).toBeCloseTo(216 * 2.3283064365386963e-10, 15);
  });
});

describe("a serial's row", () => {
  const item = {
    serial: "MW20-2609-00011",
    change: "values",
    fields: [{ name: "gainTc", from: -4.1789e-4, to: -4.1805e-4, unit: "1/K", steps: -160_000 }],
    bytes: [{ at: 58, from: 1, to: 2 }],
  };
  const row = rowOfChange(item, new Map());

  it("shows old and new in the engineering unit", () => {
    expect(row).toMatchObject({ bytesChanged: 1, values: { gainTc: { shown: "−417.89 → −418.05", steps: -160_000 } } });
  });

  it("keeps full precision in the CSV", () => {
    const columns = columnsOfField({ name: "gainTc", unit: "1/K", shown: true });
    expect(csvOf(columns, [row])).toContain("-0.00041789,-0.00041805");
  });

  it("of an added serial has no count of bytes", () => {
    expect(rowOfChange({ ...item, change: "added", fields: [], bytes: [] }, new Map()).bytesChanged).toBeNull();
  });
});
