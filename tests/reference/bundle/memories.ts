/** Layouts of memories of every shape, drawn by fast-check: kept ranges anywhere, segments in any order, any fill. */
import fc from "fast-check";
import type { ImageSources } from "@/builders/codec/sources";
import type { ByteRange, FieldValue, LayoutDocument, LayoutField, MemorySegment } from "@/schemas/documents/layout";

type Part = { kept: number } | { blank: number } | { field: Partial<LayoutField>; bytes: number };

const from = (value: string): FieldValue => ({ from: value }) as FieldValue;
const fields: Part[] = [
  { field: { name: "zero", type: "f32", value: from("coefficients.zero") }, bytes: 4 },
  { field: { name: "gain", type: "f64", value: from("coefficients.gain") }, bytes: 8 },
  { field: { name: "minor", type: "u8", value: from("package.minor") }, bytes: 1 },
  { field: { name: "mark", type: "u16", value: { const: 0xffff } }, bytes: 2 },
  { field: { name: "format", type: "u8", value: { const: 1 } }, bytes: 1 },
];
const serial: Part = { field: { name: "serial", type: "ascii", length: 16, value: from("device.serial") }, bytes: 16 };

const space = fc.oneof(
  fc.integer({ min: 1, max: 24 }).map((kept): Part => ({ kept })),
  fc.integer({ min: 1, max: 24 }).map((blank): Part => ({ blank })),
);
const parts = fc
  .tuple(fc.subarray(fields), fc.array(space, { maxLength: 8 }))
  .chain(([some, spaces]) =>
    fc.shuffledSubarray([serial, ...some, ...spaces], { minLength: 1 + some.length + spaces.length }),
  );

/** A base address where records cross 64 K, the ends of the address space, plain ones. */
export const baseAddress = fc.constantFrom(0, 7, 0x10, 0xfff8, 0x0800fff8, 0x2000_0000);

export interface MemoryShape {
  layout: LayoutDocument;
  sources: ImageSources[];
}

/** A memory in one piece. */
export const onePiece: fc.Arbitrary<MemoryShape> = shapes(fc.constant([]));

/** A memory in up to five pieces that lie apart. */
export const apart: fc.Arbitrary<MemoryShape> = shapes(jumps(4, fc.constantFrom(1, 8, 0x10000, 0xfff3)));

/**
 * A memory in up to three pieces, some of which touch in the device without being neighbours in the image; of several devices,
 * as one alone doesn't tell.
 */
export const touching: fc.Arbitrary<MemoryShape> = shapes(jumps(2, fc.constantFrom(0, 0, 1, 0x100))).filter(
  ({ sources }) => sources.length > 1,
);

/** Where pieces end, as shares of the parts; their order in the device and the addresses between them. */
interface Jump {
  share: number;
  rank: number;
  gap: number;
}

function jumps(maxLength: number, gap: fc.Arbitrary<number>): fc.Arbitrary<Jump[]> {
  return fc.array(fc.record({ share: fc.double({ min: 0, max: 1, noNaN: true }), rank: fc.nat(), gap }), { maxLength });
}

function shapes(cut: fc.Arbitrary<Jump[]>): fc.Arbitrary<MemoryShape> {
  const rank = fc.nat();
  return fc
    .record({ parts, cut, rank, base: baseAddress, fill: fc.nat(255), devices: devices() })
    .map(({ parts, cut, rank, base, fill, devices }) => ({
      layout: layoutOf(parts, cut, { rank, base, fill }),
      sources: devices,
    }));
}

function layoutOf(
  parts: readonly Part[],
  cut: readonly Jump[],
  { rank, base, fill }: { rank: number; base: number; fill: number },
): LayoutDocument {
  const fields: LayoutField[] = [];
  const kept: ByteRange[] = [];
  const starts: number[] = [];
  let at = 0;
  for (const part of parts) {
    starts.push(at);
    const bytes = "kept" in part ? part.kept : "blank" in part ? part.blank : part.bytes;
    if ("kept" in part) kept.push([at, at + bytes - 1]);
    if ("field" in part) fields.push({ ...part.field, at } as LayoutField);
    at += bytes;
  }
  const bytes = at + 2;
  const edges = [...new Set(cut.map(({ share }) => starts[Math.floor(share * starts.length)] ?? at))];
  const pieces = [0, ...edges.filter((edge) => edge > 0).sort((a, b) => a - b)].map((from, i, all) => ({
    from,
    bytes: (all[i + 1] ?? bytes) - from,
    rank: i === 0 ? rank : (cut[i - 1]?.rank ?? 0),
    gap: cut[i - 1]?.gap ?? 1,
  }));
  const addresses = new Map<number, number>();
  let address = base;
  for (const piece of [...pieces].sort((a, b) => a.rank - b.rank)) {
    addresses.set(piece.from, address);
    address += piece.bytes + piece.gap;
  }
  const place = (from: number): number => addresses.get(from) ?? 0;
  const segments = pieces.slice(1).map(({ from }): MemorySegment => ({ at: from, baseAddress: place(from) }));
  const serialAt = fields.find(({ name }) => name === "serial")?.at ?? 0;
  return {
    format: "trimwright/layout@1",
    family: "MW-20",
    version: "1.0.0",
    firmware: ">=1.0.0 <2.0.0",
    order: 1,
    memory: { bytes, pageBytes: 1, baseAddress: place(0), fill, byteOrder: "little", ...(segments[0] && { segments }) },
    kept,
    fields,
    checksums: [{ name: "sum", at, algorithm: "CRC-16/MODBUS", over: [serialAt, serialAt + 15] }],
  };
}

/** One to four invented devices. */
function devices(): fc.Arbitrary<ImageSources[]> {
  const value = fc.double({ min: -2, max: 2, noNaN: true });
  return fc
    .array(fc.record({ zero: value, gain: value, minor: fc.constantFrom(0, 1, 255) }), { minLength: 1, maxLength: 4 })
    .map((drawn) =>
      drawn.map(({ zero, gain, minor }, i) => ({
        device: { serial: `MW20-2609-${i + 1}` },
        lot: { code: "MW20-2609" },
        layout: { major: 1, minor: 0, patch: 0 },
        package: { major: 1, minor, patch: 0 },
        coefficients: { tempOffset: 0, tempSlope: 1, zero, zeroTc: 0, gain, gainTc: 0 },
        family: { referenceTemperature: 20, capacity: 20, nominalOutput: 2 },
      })),
    );
}
