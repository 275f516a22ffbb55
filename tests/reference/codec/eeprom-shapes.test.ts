/**
 * Shapes of parameter memories as the trade has them, written as layouts: is there a shape that the document can't say?
 * All are common practice, no source; the images are checked against CRCs and bytes worked out with Node's own DataView and
 * zlib, not with the codec's.
 */
import { crc32 } from "node:zlib";
import { describe, expect, it } from "vitest";
import { compileLayout } from "@/builders/codec/compile-layout";
import { checkChecksums, decodeImage, encodeImage, imageDigestBytes } from "@/builders/codec/image";
import { lintLayout } from "@/builders/codec/lint/lint";
import { coefficientsOfOrder } from "@/builders/codec/sources";
import type { FieldType, LayoutDocument, LayoutField } from "@/schemas/documents/layout";
import { shapeProblems } from "@/schemas/documents/layout-shape";
import { plainSources } from "../../unit/builders/layouts";

const sources = plainSources();

function layout(
  change: Partial<LayoutDocument> & Pick<LayoutDocument, "memory" | "fields" | "checksums">,
): LayoutDocument {
  return {
    format: "trimwright/layout@1",
    family: "LC-1",
    version: "1.0.0",
    firmware: ">=1.0.0 <2.0.0",
    order: 1,
    ...change,
  };
}

const memory = (bytes: number, more: Partial<LayoutDocument["memory"]> = {}): LayoutDocument["memory"] => ({
  bytes,
  pageBytes: 16,
  baseAddress: 0,
  fill: 255,
  byteOrder: "little",
  ...more,
});

const coefficients = (at: number, type: FieldType, width: number, scaled = false, suffix = ""): LayoutField[] =>
  coefficientsOfOrder(1).map((name, i) => ({
    name: `${name}${suffix}`,
    at: at + i * width,
    type,
    ...(scaled
      ? {
          scale: { tempOffset: 1e-3, tempSlope: 1e-6, zero: 1e-6, zeroTc: 1e-10, gain: 2.5e-7, gainTc: 1e-9 }[
            name as "zero"
          ],
        }
      : {}),
    value: { from: `coefficients.${name}` },
  }));

/** Free of errors of shape and sense, encoded, with every checksum right; the image. */
function built(document: LayoutDocument): Buffer {
  expect(shapeProblems(document)).toEqual([]);
  expect(lintLayout(document).errors).toEqual([]);
  const compiled = compileLayout(document);
  const image = encodeImage(compiled, sources);
  expect(checkChecksums(compiled, image).every((sum) => sum.ok)).toBe(true);
  const known = new Map(decodeImage(compiled, image).map((field) => [field.name, field.value]));
  for (const name of ["zero", "gainTc"] as const) {
    expect(known.get(name) as number).toBeCloseTo(sources.coefficients[name], 5);
  }
  return Buffer.from(image);
}

describe("shapes of parameter memories", () => {
  it("little-endian floats in one block behind a marker, CRC-32 at the end", () => {
    const image = built(
      layout({
        memory: memory(64),
        fields: [{ name: "marker", at: 0, type: "bytes", value: { const: "A55A" } }, ...coefficients(4, "f32", 4)],
        checksums: [{ name: "sum", at: 60, algorithm: "CRC-32/ISO-HDLC", over: [0, 59] }],
      }),
    );
    expect(image.readUInt16BE(0)).toBe(0xa55a);
    expect(image.readFloatLE(4)).toBe(Math.fround(sources.coefficients.tempOffset));
    expect(image.readUInt32LE(60)).toBe(crc32(image.subarray(0, 60)));
  });

  it("big-endian 24-bit words at consecutive addresses, with a length word before them", () => {
    const image = built(
      layout({
        memory: memory(32, { byteOrder: "big", fill: 0 }),
        fields: [{ name: "words", at: 0, type: "u16", value: { const: 6 } }, ...coefficients(2, "i24", 3, true)],
        checksums: [{ name: "sum", at: 30, algorithm: "CRC-16/XMODEM", over: [0, 19] }],
      }),
    );
    expect(image.readUInt16BE(0)).toBe(6);
    expect(image.readIntBE(2, 3)).toBe(Math.round(sources.coefficients.tempOffset / 1e-3));
    expect(image.readIntBE(8, 3)).toBe(Math.round(sources.coefficients.zero / 1e-6));
  });

  it("a big-endian header before little-endian values", () => {
    const image = built(
      layout({
        memory: memory(64, { byteOrder: "big" }),
        fields: [
          { name: "mark", at: 0, type: "u32", value: { const: 0x01020304 } },
          ...coefficients(8, "f32", 4).map((field) => ({ ...field, byteOrder: "little" as const })),
        ],
        checksums: [{ name: "sum", at: 62, algorithm: "CRC-16/MODBUS", byteOrder: "little", over: [0, 61] }],
      }),
    );
    expect([image.readUInt32BE(0), image.readFloatLE(16)]).toEqual([
      0x01020304,
      Math.fround(sources.coefficients.zero),
    ]);
  });

  it("several segments, each with a checksum of its own, and one over all of them", () => {
    const image = built(
      layout({
        memory: memory(96, { pageBytes: 32 }),
        fields: [
          { name: "serial", at: 0, type: "ascii", length: 20, value: { from: "device.serial" } },
          ...coefficients(32, "f32", 4),
        ],
        checksums: [
          { name: "head", at: 30, algorithm: "CRC-8/SMBUS", over: [0, 29] },
          { name: "values", at: 62, algorithm: "CRC-16/IBM-3740", over: [32, 61] },
          { name: "all", at: 92, algorithm: "CRC-32/ISO-HDLC", over: [0, 91] },
        ],
      }),
    );
    expect(image.readUInt32LE(92)).toBe(crc32(image.subarray(0, 92)));
  });

  it("two copies of the values, so that a cut write leaves one whole", () => {
    const copies = [...coefficients(0, "f32", 4), ...coefficients(64, "f32", 4, false, "Copy")];
    const image = built(
      layout({
        memory: memory(128, { pageBytes: 64 }),
        fields: copies,
        checksums: [
          { name: "first", at: 62, algorithm: "CRC-16/KERMIT", over: [0, 61] },
          { name: "second", at: 126, algorithm: "CRC-16/KERMIT", over: [64, 125] },
        ],
      }),
    );
    expect(image.subarray(0, 64)).toEqual(image.subarray(64));
  });

  it("bytes that belong to the factory in between, left out of digests, with a checksum on either side of them", () => {
    const document = layout({
      memory: memory(64, { baseAddress: 0x4000 }),
      kept: [[24, 31]],
      fields: coefficients(0, "f32", 4).map((field, i) => ({ ...field, at: i < 5 ? 4 * i : 32 })),
      checksums: [
        {
          name: "sum",
          at: 62,
          algorithm: "CRC-16/MODBUS",
          over: [
            [0, 23],
            [32, 61],
          ],
        },
      ],
    });
    const image = built(document);
    const device = Buffer.from(image);
    device.fill(0x77, 24, 32);
    expect(Buffer.from(imageDigestBytes(compileLayout(document), device))).toEqual(image);
  });

  it("a byte sum that makes the whole come to zero, as the oldest firmware checks it", () => {
    const image = built(
      layout({
        memory: memory(32, { pageBytes: 1, fill: 0 }),
        fields: coefficients(0, "f32", 4),
        checksums: [{ name: "sum", at: 31, algorithm: { sum: 8, complement: "twos" }, over: [0, 30] }],
      }),
    );
    expect(image.reduce((sum, byte) => sum + byte, 0) % 256).toBe(0);
  });

  it("flags in the bits of a byte, a packed decimal date and a table of points", () => {
    const image = built(
      layout({
        memory: memory(64),
        fields: [
          ...coefficients(0, "f32", 4),
          {
            name: "flags",
            at: 24,
            type: "u8",
            value: {
              bits: [
                { name: "ready", from: 0, width: 1, value: { const: 1 } },
                { name: "order", from: 4, width: 2, value: { const: 1 } },
              ],
            },
          },
          { name: "date", at: 25, type: "bcd", length: 3, value: { const: 260914 } },
          { name: "points", at: 28, type: "i16", count: 3, value: { const: [-10, 20, 40] } },
        ],
        checksums: [{ name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 61] }],
      }),
    );
    // Bits that no part names stay as in the fill: 1100 1110 of FF is left, 1 and 01 are set.
    expect(image[24]).toBe(0xdf);
    expect([image.readInt16LE(28), image.readInt16LE(30), image.readInt16LE(32)]).toEqual([-10, 20, 40]);
    expect([...image.subarray(25, 28)].map((byte) => byte.toString(16).padStart(2, "0")).sort()).toEqual([
      "09",
      "14",
      "26",
    ]);
  });
});
