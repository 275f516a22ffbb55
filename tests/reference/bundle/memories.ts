/** Layouts of memories of every shape, drawn by fast-check: kept ranges anywhere, segments in any order, any fill. */
import fc from "fast-check";
import type { ImageSources } from "@/builders/codec/sources";
import type { ByteRange, FieldValue, LayoutDocument, LayoutField, MemorySegment } from "@/schemas/documents/layout";

type Part = { kept: number } | { blank: number } | { field: Partial<LayoutField>; bytes: number };

const SUM_BYTES = 2;

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

interface Base {
  rank: number;
  base: number;
  fill: number;
}

function layoutOf(parts: readonly Part[], cut: readonly Jump[], base: Base): LayoutDocument {
  const { starts, at, fields, kept } = laidOut(parts);
  const drawn = cut.map(({ share }) => starts[Math.floor(share * starts.length)] ?? at);
  const edges = [...new Set([0, ...drawn])].sort((a, b) => a - b);
  const [first = 0, ...more] = addressesOf(edges, at + SUM_BYTES, cut, base);
  const segments = more.map((baseAddress, i): MemorySegment => ({ at: edges[i + 1] as number, baseAddress }));
  const serialAt = fields.find(({ name }) => name === "serial")?.at ?? 0;
  const memory = {
    bytes: at + SUM_BYTES,
    pageBytes: 1,
    baseAddress: first,
    fill: base.fill,
    byteOrder: "little",
  } as const;
  return {
    format: "trimwright/layout@1",
    family: "MW-20",
    version: "1.0.0",
    firmware: ">=1.0.0 <2.0.0",
    order: 1,
    memory: segments.length > 0 ? { ...memory, segments } : memory,
    kept,
    fields,
    checksums: [{ name: "sum", at, algorithm: "CRC-16/MODBUS", over: [serialAt, serialAt + 15] }],
  };
}

/** Parts one behind the other; `at` is where the checksum follows. */
function laidOut(parts: readonly Part[]) {
  const [fields, kept, starts]: [LayoutField[], ByteRange[], number[]] = [[], [], []];
  let at = 0;
  for (const part of parts) {
    starts.push(at);
    const bytes = "kept" in part ? part.kept : "blank" in part ? part.blank : part.bytes;
    if ("kept" in part) kept.push([at, at + bytes - 1]);
    if ("field" in part) fields.push({ ...part.field, at } as LayoutField);
    at += bytes;
  }
  return { starts, at, fields, kept };
}

/** Addresses of the pieces that start at some offsets: from the base on by rank, with the gaps between them. */
function addressesOf(starts: readonly number[], bytes: number, cut: readonly Jump[], { rank, base }: Base): number[] {
  const pieces = starts.map((start, i) => ({
    i,
    bytes: (starts[i + 1] ?? bytes) - start,
    ...(cut[i - 1] ?? { rank, gap: 1 }),
  }));
  const addresses: number[] = [];
  let address = base;
  for (const piece of pieces.sort((a, b) => a.rank - b.rank)) {
    addresses[piece.i] = address;
    address += piece.bytes + piece.gap;
  }
  return addresses;
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
