import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { sha256Hex } from "@/builders/bundle/sha256";
import { type VerifyStep, verifyBundleFiles } from "@/builders/bundle/verify-bundle";
import { compileLayout } from "@/builders/codec/compile-layout";
import { writeHexPieces, writeIntelHex } from "@/builders/codec/files/intel-hex-write";
import { encodeImage } from "@/builders/codec/image";
import type { ImageSources } from "@/builders/codec/sources";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { releasedFiles } from "@/tests/reference/bundle/bundle-files";
import { exampleRelease, type PackedDevice, packageOf, packDevices } from "@/tests/reference/bundle/example";
import { apart, type MemoryShape, onePiece, touching } from "@/tests/reference/bundle/memories";
import { readGolden } from "@/tests/reference/codec/golden";

const encoder = new TextEncoder();

/** The step about the images of a bundle that is in order otherwise: every list of digests fits what is packed. */
function imagesStep(layout: LayoutDocument, devices: readonly PackedDevice[]): VerifyStep | undefined {
  const { content, manifest } = packageOf(layout, devices);
  const files = releasedFiles(content, exampleRelease(content, manifest));
  const bytes = [...files].map(([path, file]): [string, Uint8Array] => [
    path,
    typeof file === "string" ? encoder.encode(file) : file,
  ]);
  const { steps } = verifyBundleFiles(new Map(bytes));
  expect(steps.filter((step) => step.name !== "images" && !step.ok)).toEqual([]);
  return steps.find((step) => step.name === "images");
}

const devicesOf = ({ layout, sources }: MemoryShape) => packDevices(compileLayout(layout), sources);

/** A HEX with some bytes of its data changed, numbered through all records, and the checks of these made anew. */
function withBytes(hex: string, change: (data: number[]) => void): string {
  const records = hex.split("\n").map((line) => [...Buffer.from(line.slice(1), "hex")]);
  const data = records.flatMap((record) => (record[3] === 0 ? record.slice(4, -1) : []));
  change(data);
  let next = 0;
  const lines = records.map((record) => {
    if (record[3] !== 0 || record.length < 5) return record;
    const head = [...record.slice(0, 4), ...data.slice(next, next + record.length - 5)];
    next += record.length - 5;
    return [...head, -head.reduce((sum, byte) => sum + byte, 0) & 0xff];
  });
  return lines
    .map((bytes) => (bytes.length > 0 ? `:${Buffer.from(bytes).toString("hex").toUpperCase()}` : ""))
    .join("\n");
}

const changed = (
  devices: readonly PackedDevice[],
  at: number,
  change: (device: PackedDevice) => Partial<PackedDevice>,
) => devices.map((device, i) => (i === at % devices.length ? { ...device, ...change(device) } : device));

const SHAPES: [name: string, shape: fc.Arbitrary<MemoryShape>][] = [
  ["in one piece, ranges of it kept", onePiece],
  ["in pieces that lie apart, ranges of it kept", apart],
  ["in pieces that touch", touching],
];

describe.each(SHAPES)("the images of a memory %s", (_name, shape) => {
  it("hold their digests", () => {
    fc.assert(
      fc.property(shape, (memory) => {
        expect(imagesStep(memory.layout, devicesOf(memory))).toEqual({
          name: "images",
          ok: true,
          message: `${memory.sources.length} images: each HEX holds the image whose digest the manifest names, and its values`,
        });
      }),
      { numRuns: 200 },
    );
  });

  it("are refused where a byte of one HEX was changed along with every list of files", () => {
    fc.assert(
      fc.property(shape, fc.nat(), fc.nat(), fc.integer({ min: 1, max: 255 }), (memory, which, at, bits) => {
        const devices = changed(devicesOf(memory), which, ({ hex }) => ({
          hex: withBytes(hex, (data) => {
            data[at % data.length] = (data[at % data.length] as number) ^ bits;
          }),
        }));
        const { serial } = devices[which % devices.length] as PackedDevice;
        expect(imagesStep(memory.layout, devices)).toMatchObject({
          ok: false,
          message: `images/${serial}.hex holds another image of ${serial} than the manifest names`,
        });
      }),
      { numRuns: 200 },
    );
  });

  it("are refused where values say other bytes than the HEX", () => {
    fc.assert(
      fc.property(shape, fc.nat(), fc.nat(), (memory, which, at) => {
        const devices = changed(devicesOf(memory), which, ({ fields }) => ({
          fields: fields.map((field, i) =>
            i === at % fields.length
              ? { ...field, raw: field.raw.replace(/^./, (digit) => (digit === "5" ? "6" : "5")) }
              : field,
          ),
        }));
        const { serial } = devices[which % devices.length] as PackedDevice;
        expect(imagesStep(memory.layout, devices)).toMatchObject({
          ok: false,
          message: expect.stringContaining(`The values of ${serial} are not `),
        });
      }),
      { numRuns: 100 },
    );
  });

  it("are refused where two bytes of one HEX among several changed places", () => {
    const several = shape.filter(({ sources }) => sources.length > 1);
    fc.assert(
      fc.property(several, fc.nat(), fc.nat(), fc.nat(), (memory, which, one, other) => {
        const devices = devicesOf(memory);
        const hex = (devices[which % devices.length] as PackedDevice).hex;
        const exchanged = withBytes(hex, (data) => {
          const [a, b] = [one % data.length, other % data.length];
          [data[a], data[b]] = [data[b] as number, data[a] as number];
        });
        fc.pre(exchanged !== hex);
        expect(
          imagesStep(
            memory.layout,
            changed(devices, which, () => ({ hex: exchanged })),
          )?.ok,
        ).toBe(false);
      }),
      { numRuns: 100 },
    );
  });
});

describe("the images of the golden lot", () => {
  const { layout, compiled, sources } = readGolden(".", "MW20-2609");
  const devices = packDevices(compiled, sources);
  const [first, second] = devices as [PackedDevice, PackedDevice];

  it("are refused where one has no digest of its own", () => {
    const sha256 = "0".repeat(64);
    expect(
      imagesStep(
        layout,
        changed(devices, 1, () => ({ sha256 })),
      ),
    ).toMatchObject({
      ok: false,
      message: `images/${second.serial}.hex holds another image of ${second.serial} than the manifest names`,
    });
  });

  it("are refused where one lies elsewhere, is longer or lacks a field", () => {
    const moved = writeIntelHex(encodeImage(compiled, sources[0] as ImageSources), 0x40, []);
    const cases: [Partial<PackedDevice>, RegExp][] = [
      [{ hex: moved }, /does not lie at the same addresses as/],
      [{ bytes: first.bytes + 1 }, /is not as long as that of/],
      [{ fields: first.fields.slice(1) }, /are not of the same fields as those of/],
      [{ bytes: 1e9 }, /has 1000000000 bytes; a layout has 1 to 65536/],
    ];
    for (const [change, message] of cases) {
      expect(
        imagesStep(
          layout,
          changed(devices, 2, () => change),
        ),
      ).toMatchObject({
        ok: false,
        message: expect.stringMatching(message),
      });
    }
  });

  it("are refused where fields are no bytes of the image", () => {
    const lies = [
      { at: -1 },
      { at: 0.5 },
      { at: first.bytes },
      { raw: "0" },
      { raw: "xy" },
      { raw: "" },
      { raw: 7 },
      { raw: [] },
      { raw: null },
    ];
    for (const lie of lies) {
      const all = devices.map((device) => ({
        ...device,
        fields: device.fields.map((field, i) => (i === 0 ? ({ ...field, ...lie } as typeof field) : field)),
      }));
      expect(imagesStep(layout, all), JSON.stringify(lie)).toMatchObject({ ok: false });
    }
  });
});

describe("an image whose HEX was made so that its places can't be found", () => {
  const { layout } = readGolden(".", "MW20-2609");

  it("is held against the bytes of its HEX, and the step says that no digest was computed from it", () => {
    expect(imagesStep(layout, [puzzle()])).toMatchObject({
      ok: true,
      message: expect.stringMatching(/^1 images .* digest of 1 images was computed from their values alone/),
    });
  });

  it("is refused with other bytes, or with other values", () => {
    const hex = withBytes(puzzle().hex, (data) => data.reverse().fill(7, 0, 1));
    expect(imagesStep(layout, [{ ...puzzle(), hex }])).toMatchObject({ ok: false });
    const fields = puzzle().fields.map((field) => ({ ...field, raw: "07" }));
    expect(imagesStep(layout, [{ ...puzzle(), fields }])).toMatchObject({ ok: false });
    const second = { ...puzzle(), serial: "B", fields };
    expect(imagesStep(layout, [puzzle(), second])).toMatchObject({
      ok: false,
      message: "The values of B are not those of the image that the manifest names",
    });
  });
});

/** Runs of fill with even lengths that would have to be put into two odd spaces: a bin packing that can only be tried out. */
function puzzle(): PackedDevice {
  const lengths = [1, 1, ...Array.from({ length: 30 }, (_, i) => 2 * (i + 1))];
  const bytes = lengths.reduce((sum, length) => sum + length, 0);
  const image = new Uint8Array(bytes).fill(0xff);
  const middle = bytes / 2;
  image[0] = 1;
  image[middle] = 2;
  let at = 0;
  const pieces = lengths.map((length, i) => {
    const piece = { at, end: at + length, address: 0x1000 * i };
    at += length;
    return piece;
  });
  const data = new Uint8Array(bytes).fill(0xff);
  data.set([1, 2]);
  const field = { name: "one", at: 0, raw: "01", unit: null, value: 1 };
  return {
    serial: "A",
    bytes,
    sha256: sha256Hex(image),
    hex: writeHexPieces(data, pieces),
    fields: [field, { ...field, name: "two", at: middle, raw: "02", value: 2 }],
  };
}
