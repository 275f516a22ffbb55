import { describe, expect, it } from "vitest";
import { findReadDifference } from "@/builders/bundle/independent-read";
import { sha256Hex } from "@/builders/bundle/sha256";
import { assembleImage } from "@/builders/codec/files/hex-image";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { writeIntelHex } from "@/builders/codec/files/intel-hex-write";
import { checkChecksums, decodeImage, encodeImage, imageDigestBytes } from "@/builders/codec/image";
import { lintLayout } from "@/builders/codec/lint/lint";
import { twinOf, twinOutput } from "@/builders/codec/twin/twin";
import { parseLayout } from "@/schemas/documents/layout";
import { readGolden } from "@/tests/reference/codec/golden";

// Source of the expected bytes: tests/fixtures/golden, computed by an independent program.
describe.each([
  { folder: ".", lot: "MW20-2609", devices: 28, hexes: 4 },
  { folder: "second", lot: "MW300-2610", devices: 14, hexes: 2 },
] as const)("golden example of lot $lot", ({ folder, lot, devices, hexes }) => {
  const golden = readGolden(folder, lot);
  const images = new Map(golden.sources.map((one) => [one.device.serial, encodeImage(golden.compiled, one)]));

  it("gives every image its expected SHA-256", () => {
    const digests = Object.fromEntries([...images].map(([serial, bytes]) => [serial, sha256Hex(bytes)]));
    expect(Object.keys(digests)).toHaveLength(devices);
    expect(digests).toEqual(golden.digests);
  });

  it("writes the HEX files byte for byte", () => {
    expect(golden.hexes.size).toBe(hexes);
    for (const [serial, expected] of golden.hexes) {
      const hex = writeIntelHex(
        images.get(serial) as Uint8Array,
        golden.layout.memory.baseAddress,
        golden.layout.kept ?? [],
      );
      expect(hex).toBe(expected);
    }
  });

  it("reads the HEX files back to the images", () => {
    for (const [serial, hex] of golden.hexes) {
      const read = assembleImage(golden.compiled, readIntelHex(hex).segments);
      expect(read).toEqual({ bytes: images.get(serial), missing: [], outside: [] });
    }
  });

  it("is read alike by the npm package intel-hex", () => {
    const { memory, kept = [] } = golden.layout;
    for (const bytes of images.values()) {
      const hex = writeIntelHex(bytes, memory.baseAddress, kept);
      expect(findReadDifference(hex, bytes, { ...memory, kept })).toBeUndefined();
    }
  });

  it("has a layout of the right shape without errors", () => {
    expect(parseLayout(golden.layout).problems).toBeUndefined();
    expect(lintLayout(golden.layout).errors).toEqual([]);
  });

  it("decodes what was encoded, within half a step, with checksums that hold", () => {
    for (const sources of golden.sources) {
      const bytes = images.get(sources.device.serial) as Uint8Array;
      const decoded = decodeImage(golden.compiled, bytes);
      golden.compiled.fields.forEach((field, i) => {
        const given = field.read(sources);
        if (typeof given !== "number") return;
        const half = field.number?.kind === "integer" ? Math.abs(field.scale) / 2 : Math.abs(given) * 2 ** -24;
        expect(Math.abs((decoded[i]?.value as number) - given)).toBeLessThanOrEqual(half * (1 + 1e-6));
      });
      expect(checkChecksums(golden.compiled, bytes).every((sum) => sum.ok)).toBe(true);
    }
  });

  it("leaves the digest alone whatever the device keeps in its own ranges", () => {
    const bytes = (images.values().next().value as Uint8Array).slice();
    for (const [from, to] of golden.layout.kept ?? []) bytes.fill(0x5a, from, to + 1);
    expect(sha256Hex(imageDigestBytes(golden.compiled, bytes))).toBe(Object.values(golden.digests)[0]);
  });

  it("computes as the formula does with the coefficients as given, up to rounding", () => {
    for (const sources of golden.sources) {
      const { referenceTemperature: reference } = sources.family;
      const decoded = decodeImage(golden.compiled, images.get(sources.device.serial) as Uint8Array);
      const twin = twinOf(golden.compiled, decoded, sources.family);
      const exact = { coefficients: sources.coefficients, referenceTemperature: reference };
      expect(Math.abs(twinOutput(twin, 1.5, 2000) - twinOutput(exact, 1.5, 2000))).toBeLessThan(5e-6);
    }
  });
});
