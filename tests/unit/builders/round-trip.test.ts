import { describe, expect, it } from "vitest";
import { decodeImage, encodeImage } from "@/builders/codec/image";
import { listRoundTripFaults } from "@/builders/codec/round-trip";
import { twinOf } from "@/builders/codec/twin/twin";
import { twinErrors } from "@/builders/codec/twin/twin-errors";
import { derive } from "@/lib/domain/compensation/derive";
import { readGolden } from "@/tests/reference/codec/golden";
import { readFamily, readJson, readLot } from "@/tests/unit/compensation/golden-example";

describe.each([
  { folder: "." as const, lot: "MW20-2609" },
  { folder: "second" as const, lot: "MW300-2610" },
])("the images of golden lot $lot", ({ folder, lot }) => {
  const golden = readGolden(folder, lot);
  const prefix = folder === "." ? "" : "second/";
  const family = readFamily(`${prefix}family.json`);

  it("read back without a fault, device by device", () => {
    for (const sources of golden.sources) {
      const bytes = encodeImage(golden.compiled, sources);
      expect(listRoundTripFaults(golden.compiled, sources, bytes, decodeImage(golden.compiled, bytes))).toEqual([]);
    }
  });

  it("tell every field that was put in another device's image", () => {
    const [one, other] = golden.sources;
    if (!one || !other) throw new Error("the example has devices");
    const bytes = encodeImage(golden.compiled, other);
    const faults = listRoundTripFaults(golden.compiled, one, bytes, decodeImage(golden.compiled, bytes));
    expect(faults.map((fault) => fault.field)).toEqual(
      expect.arrayContaining(["serial", "zero", "gain", "tempOffset"]),
    );
  });

  it("tell a byte that changed after the checksum was made", () => {
    const [sources] = golden.sources;
    if (!sources) throw new Error("the example has devices");
    const bytes = encodeImage(golden.compiled, sources);
    const fill = golden.compiled.checksums[0]?.over[0]?.[0] ?? 0;
    bytes[fill] = (bytes[fill] as number) ^ 0x01;
    const faults = listRoundTripFaults(golden.compiled, sources, bytes, decodeImage(golden.compiled, bytes));
    expect(faults.some((fault) => golden.compiled.checksums.some((sum) => sum.name === fault.field))).toBe(true);
  });

  // Source of the expected figures: tests/fixtures/golden, by an independent program; it knows nothing of rounding in bytes.
  it("predict the verification errors that were expected, but for the rounding of the stored values", () => {
    const { exclude = [], verification } = readJson<{
      exclude?: string[];
      verification: Record<string, { spanErrorPpm: number }>;
    }>(`${prefix}expected-coefficients.json`);
    const derived = derive({
      family,
      method: "pooled-gain",
      order: 1,
      runs: readLot(prefix),
      exclude: exclude.map((serial) => ({ serial, reason: "as in the example" })),
    });
    for (const [serial, expected] of Object.entries(verification)) {
      const sources = golden.sources.find((one) => one.device.serial === serial);
      const points = derived.devices.find((one) => one.serial === serial)?.points;
      if (!sources || !points) throw new Error(`${serial} is in the example`);
      const decoded = decodeImage(golden.compiled, encodeImage(golden.compiled, sources));
      const twin = twinOf(golden.compiled, decoded, { referenceTemperature: family.referenceC });
      const errors = twinErrors(twin, points, points, family);
      expect(Math.abs((errors.spanErrorPpm as number) - expected.spanErrorPpm)).toBeLessThan(2);
    }
  });
});
