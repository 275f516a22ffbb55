import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { findChecksumWidth } from "@/builders/codec/checksum-algorithm";
import { compileLayout } from "@/builders/codec/compile-layout";
import { compareImages } from "@/builders/codec/difference";
import { assembleImage, writeImageHex, writeImageSRecords } from "@/builders/codec/files/hex-image";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { readSRecords } from "@/builders/codec/files/s-record-read";
import { checkChecksums, decodeImage, encodeImage, imageDigestBytes } from "@/builders/codec/image";
import { joinRanges } from "@/builders/codec/memory-map";
import { listRoundTripFaults, storageTolerance } from "@/builders/codec/round-trip";
import type { ByteRange, LayoutDocument } from "@/schemas/documents/layout";
import { oneFieldLayout, plainSources, smallLayout } from "../layouts";
import { algorithm, byteOrder, numberCase } from "./arbitrary";

describe("decode(encode(x))", () => {
  it("lies within half a step of x, for every type, byte order and scale", () => {
    fc.assert(
      fc.property(numberCase, byteOrder, ({ field, value }, order) => {
        const layout = compileLayout(oneFieldLayout({ byteOrder: order, value: { const: value }, ...field }));
        const bytes = encodeImage(layout, plainSources());
        const decoded = decodeImage(layout, bytes);
        const [cell] = layout.fields;
        if (!cell) throw new Error("there is one field");
        const tolerance = storageTolerance(cell, value);
        expect(Math.abs((decoded[0]?.value as number) - value)).toBeLessThanOrEqual(tolerance);
        expect(listRoundTripFaults(layout, plainSources(), bytes, decoded)).toEqual([]);
      }),
      { numRuns: 600 },
    );
  });

  it("is x for 64-bit integers, whatever their size", () => {
    const wide = fc.oneof(
      fc.bigInt({ min: 0n, max: 2n ** 64n - 1n }).map((value) => ({ type: "u64" as const, value })),
      fc.bigInt({ min: -(2n ** 63n), max: 2n ** 63n - 1n }).map((value) => ({ type: "i64" as const, value })),
    );
    fc.assert(
      fc.property(wide, byteOrder, ({ type, value }, order) => {
        const layout = compileLayout(oneFieldLayout({ type, byteOrder: order, value: { const: String(value) } }));
        const [decoded] = decodeImage(layout, encodeImage(layout, plainSources()));
        expect(decoded?.value).toBe(String(value));
      }),
    );
  });

  it("is x for texts and bytes", () => {
    const text = fc.string({
      unit: fc.integer({ min: 0x20, max: 0x7e }).map((c) => String.fromCharCode(c)),
      maxLength: 20,
    });
    const hex = fc.uint8Array({ minLength: 1, maxLength: 20 }).map((bytes) => Buffer.from(bytes).toString("hex"));
    fc.assert(
      fc.property(text, hex, (ascii, bytes) => {
        for (const [field, value] of [
          [{ type: "ascii" as const, length: 20 }, ascii],
          [{ type: "bytes" as const }, bytes],
        ] as const) {
          const layout = compileLayout(oneFieldLayout({ ...field, value: { const: value } }));
          expect(decodeImage(layout, encodeImage(layout, plainSources()))[0]?.value).toBe(value);
        }
      }),
    );
  });
});

describe("a checksum", () => {
  const ranges = fc
    .uniqueArray(fc.nat(50), { minLength: 2, maxLength: 8, comparator: "IsStrictlyEqual" })
    .map((offsets) => offsets.sort((a, b) => a - b))
    .filter((offsets) => offsets.length % 2 === 0)
    .map((offsets): ByteRange[] =>
      offsets.flatMap((from, i) => (i % 2 === 0 ? [[from, offsets[i + 1] as number]] : [])),
    );

  it("tells any flipped bit inside its ranges and none outside", () => {
    fc.assert(
      fc.property(algorithm, ranges, byteOrder, fc.nat(), fc.nat(), (check, over, order, place, turn) => {
        const at = 64 - (findChecksumWidth(check) as number);
        const sum = {
          name: "sum",
          at,
          algorithm: check,
          byteOrder: order,
          over: turn % 2 ? over : [...over].reverse(),
        };
        const layout = compileLayout(smallLayout({ checksums: [sum] }));
        const bytes = encodeImage(layout, plainSources());
        expect(checkChecksums(layout, bytes)).toMatchObject([{ ok: true }]);
        const flipped = place % (8 * at);
        const byte = Math.floor(flipped / 8);
        bytes[byte] = (bytes[byte] as number) ^ (1 << (flipped % 8));
        const covered = over.some(([from, to]) => byte >= from && byte <= to);
        expect(checkChecksums(layout, bytes)).toMatchObject([{ ok: !covered }]);
      }),
      { numRuns: 600 },
    );
  });

  it("runs through its ranges in the order that is stated", () => {
    const twoWays = [
      [
        [0, 9],
        [20, 29],
      ],
      [
        [20, 29],
        [0, 9],
      ],
    ].map((over) => {
      const sum = { name: "sum", at: 62, algorithm: "CRC-16/IBM-3740", over: over as ByteRange[] };
      const layout = compileLayout(smallLayout({ checksums: [sum] }));
      return checkChecksums(layout, encodeImage(layout, plainSources()))[0]?.expected;
    });
    expect(twoWays[0]).not.toBe(twoWays[1]);
  });
});

describe("a difference", () => {
  it("applied to the image it starts from gives the other, for any two images of any layouts", () => {
    const image = fc.uint8Array({ minLength: 64, maxLength: 64 });
    const kept = fc.constantFrom<ByteRange[]>(
      [],
      [[44, 50]],
      [
        [44, 44],
        [52, 55],
      ],
    );
    fc.assert(
      fc.property(image, image, kept, kept, (a, b, keptA, keptB) => {
        const document = (ranges: ByteRange[]): LayoutDocument =>
          smallLayout({
            kept: ranges,
            checksums: [{ name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 43] }],
          });
        const from = { layout: compileLayout(document(keptA)), bytes: a };
        const to = { layout: compileLayout(document(keptB)), bytes: b };
        const result = imageDigestBytes(from.layout, a).slice();
        for (const byte of compareImages(from, to).bytes) {
          expect(result[byte.at]).toBe(byte.from);
          result[byte.at] = byte.to as number;
        }
        expect(result).toEqual(imageDigestBytes(to.layout, b));
        expect(compareImages(from, from).bytes).toEqual([]);
      }),
    );
  });
});

describe("files for stations", () => {
  const place = fc
    .record({
      baseAddress: fc.oneof(fc.nat(0x2_0000), fc.constantFrom(0, 0xffe8, 0x0800_0000, 0xffff_ffc0)),
      kept: fc.array(fc.tuple(fc.nat(13), fc.nat(13)), { maxLength: 3 }),
      cut: fc.option(fc.record({ at: fc.integer({ min: 1, max: 15 }), gap: fc.nat(0x3_0000) }), { nil: null }),
    })
    .filter(({ baseAddress, cut }) => cut === null || baseAddress < 0xf000_0000)
    .map(({ baseAddress, kept, cut }) => ({
      baseAddress,
      kept: joinRanges(
        kept.map(([from, more]): ByteRange => [42 + from, 42 + from + more]),
        62,
      ),
      // Where a field ends; what lies behind the cut lies that much higher.
      segments: cut === null ? undefined : [{ at: 42 + cut.at, baseAddress: baseAddress + 42 + cut.at + cut.gap }],
    }));

  it("hold the image wherever it lies, without what is kept, for our own readers", () => {
    fc.assert(
      fc.property(place, fc.uint8Array({ minLength: 64, maxLength: 64 }), ({ baseAddress, kept, segments }, bytes) => {
        const memory = { ...smallLayout().memory, baseAddress, segments };
        const sum = { name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 41] as ByteRange };
        const layout = compileLayout(smallLayout({ memory, kept, checksums: [sum] }));
        for (const read of [
          readIntelHex(writeImageHex(layout, bytes)),
          readSRecords(writeImageSRecords(layout, bytes)),
        ]) {
          expect(assembleImage(layout, read.segments)).toEqual({
            bytes: imageDigestBytes(layout, bytes),
            missing: [],
            outside: [],
          });
          const held = read.segments.reduce((total, one) => total + one.bytes.length, 0);
          expect(held).toBe(64 - layout.kept.reduce((total, [from, to]) => total + to - from + 1, 0));
        }
      }),
      { numRuns: 250 },
    );
  });
});
