import { describe, expect, it } from "vitest";
import { compileLayout } from "@/builders/codec/compile-layout";
import { compareImages } from "@/builders/codec/difference";
import { encodeImage } from "@/builders/codec/image";
import type { ImageSources } from "@/builders/codec/sources";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";
import { plainSources, smallLayout } from "./layouts";

const imageOf = (document: LayoutDocument, change: Partial<ImageSources> = {}) => {
  const layout = compileLayout(document);
  return { layout, bytes: encodeImage(layout, plainSources(change)) };
};
const later = { package: { major: 1, minor: 3, patch: 0 } };
const withGainTc = (gainTc: number) => ({ coefficients: { ...plainSources().coefficients, gainTc } });
const changedField = (name: string, change: Partial<LayoutField>): LayoutDocument => {
  const layout = smallLayout();
  return { ...layout, fields: layout.fields.map((field) => (field.name === name ? { ...field, ...change } : field)) };
};

describe("two images of one layout", () => {
  const layout = compileLayout(smallLayout());
  const of = (change: Partial<ImageSources> = {}) => ({ layout, bytes: encodeImage(layout, plainSources(change)) });

  it("are the same where no byte differs", () => {
    expect(compareImages(of(), of())).toEqual({ change: "same", fields: [], bytes: [] });
  });

  it("differ in version only where nothing but version numbers and checksums do", () => {
    const found = compareImages(of(), of(later));
    expect(found.change).toBe("version-only");
    expect(found.fields.map((field) => field.name)).toEqual(["version", "sum"]);
    expect(found.fields[0]).toEqual({ name: "version", from: 2, to: 3, unit: null, steps: 1 });
    expect(found.bytes.map((byte) => byte.at)).toEqual([40, 62, 63]);
  });

  it("tell a changed value in its unit and in stored steps, and each byte", () => {
    const found = compareImages(of(withGainTc(-4e-4)), of(withGainTc(-4e-4 + 1044e-12)));
    expect(found.change).toBe("values");
    expect(found.fields[0]).toMatchObject({ name: "gainTc", unit: "1/K", steps: 1044 });
    const bytes = found.bytes.filter((byte) => byte.at < 40);
    expect(bytes.every((byte) => byte.at >= 36 && byte.from !== byte.to)).toBe(true);
  });

  it("give no steps for floats, texts and checksums", () => {
    const found = compareImages(of(), of({ device: { serial: "LC1-00008" }, ...later }));
    expect(found.fields.map(({ name, steps }) => [name, steps])).toEqual([
      ["serial", null],
      ["version", 1],
      ["sum", null],
    ]);
  });

  it("count values as values even when a version differs too", () => {
    expect(compareImages(of(), of({ ...later, ...withGainTc(-3e-4) })).change).toBe("values");
  });
});

describe("two images of two layouts", () => {
  it("are the same where the layouts differ in texts and limits only", () => {
    const other = changedField("gainTc", { min: -0.002, max: 0.002 });
    expect(compareImages(imageOf(smallLayout()), imageOf(other)).change).toBe("same");
  });

  it("take a field under another name for the same field", () => {
    const other = changedField("gainTc", { name: "gainDrift" });
    expect(compareImages(imageOf(smallLayout()), imageOf(other))).toMatchObject({ change: "same", fields: [] });
    expect(compareImages(imageOf(smallLayout()), imageOf(other, later)).change).toBe("version-only");
    const found = compareImages(imageOf(smallLayout()), imageOf(other, withGainTc(-4e-4 + 5e-12)));
    expect(found.fields[0]).toMatchObject({ name: "gainDrift", steps: 5 });
  });

  it("take a version number under another name for a version number", () => {
    const other = changedField("version", { name: "packageMinor" });
    const found = compareImages(imageOf(smallLayout()), imageOf(other, later));
    expect(found.change).toBe("version-only");
    expect(found.fields.map((field) => field.name)).toEqual(["packageMinor", "sum"]);
  });

  it("give no steps where the scale is another", () => {
    const other = changedField("gainTc", { scale: 2e-12 });
    const found = compareImages(imageOf(smallLayout()), imageOf(other));
    expect(found.change).toBe("values");
    expect(found.fields.find((field) => field.name === "gainTc")?.steps ?? null).toBeNull();
  });

  it("count a version number that moved as values, as firmware reads other bytes", () => {
    const other = changedField("version", { at: 42 });
    expect(compareImages(imageOf(smallLayout()), imageOf(other)).change).toBe("values");
  });

  it("name fields that are new and fields that are gone", () => {
    const layout = smallLayout();
    const more: LayoutField = { name: "made", at: 44, type: "u8", value: { const: 7 } };
    const larger = { ...layout, fields: [...layout.fields, more] };
    const added = compareImages(imageOf(layout), imageOf(larger));
    expect(added.fields.find((field) => field.name === "made")).toMatchObject({ from: null, to: 7, steps: null });
    const gone = compareImages(imageOf(larger), imageOf(layout));
    expect(gone.fields.find((field) => field.name === "made")).toMatchObject({ from: 7, to: null, steps: null });
  });

  it("compare memories of two sizes byte by byte to the end of the longer one", () => {
    const larger = smallLayout({ memory: { ...smallLayout().memory, bytes: 80 } });
    const found = compareImages(imageOf(smallLayout()), imageOf(larger));
    expect(found.change).toBe("values");
    expect(found.bytes.filter((byte) => byte.at >= 64)).toHaveLength(16);
    expect(found.bytes.at(-1)).toEqual({ at: 79, from: null, to: 255 });
  });

  it("leave out what the device keeps", () => {
    const kept = smallLayout({
      kept: [[48, 55]],
      checksums: [{ name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 47] }],
    });
    const before = imageOf(kept);
    const after = { ...before, bytes: before.bytes.slice() };
    after.bytes[50] = 1;
    expect(compareImages(before, after).change).toBe("same");
  });
});
