import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { hexPath } from "@/builders/bundle/bundle";
import { ByteSink } from "@/builders/bundle/byte-sink";
import { ContentWriter } from "@/builders/bundle/content-writer";
import { HexTemplate } from "@/builders/bundle/hex-template";
import { imageLine } from "@/builders/bundle/images-jsonl";
import { buildManifest, type Manifest, manifestBytes } from "@/builders/bundle/manifest";
import { sha256Hex } from "@/builders/bundle/sha256";
import { sumsText } from "@/builders/bundle/sums";
import { ValuesTemplate } from "@/builders/bundle/values-template";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { writeIntelHex } from "@/builders/codec/files/intel-hex-write";
import { decodeImage, imageDigestBytes } from "@/builders/codec/image";
import { firstGolden, secondGolden } from "../../support/scenario/golden";

/** Layouts that differ in length, base address, fill, kept ranges and byte order. */
const layouts: CompiledLayout[] = [firstGolden(), secondGolden()].flatMap(({ layout }) => {
  const document = JSON.parse(layout);
  const moved = { ...document, memory: { ...document.memory, baseAddress: 0x0800fff8 } };
  return [document, moved, { ...document, kept: [[document.memory.bytes - 40, document.memory.bytes - 20]] }].flatMap(
    (one) => {
      try {
        return [compileLayout(one)];
      } catch {
        return []; // the kept range lies over a field
      }
    },
  );
});

/** Images of a layout with any bytes, some of them alike, as those of a package are. */
const images = ({ bytes }: CompiledLayout) =>
  fc
    .tuple(
      fc.uint8Array({ minLength: bytes, maxLength: bytes }),
      fc.array(fc.array(fc.tuple(fc.nat(bytes - 1), fc.nat(255)), { maxLength: 12 }), { minLength: 1, maxLength: 6 }),
    )
    .map(([first, changes]) => changes.map((list) => changed(first, list)));

function changed(image: Uint8Array, list: readonly [number, number][]): Uint8Array {
  const copy = image.slice();
  for (const [at, byte] of list) copy[at] = byte;
  return copy;
}

describe.each(layouts.map((layout, i) => ({ i, layout })))("layout $i", ({ layout }) => {
  it("gets the HEX text of the plain writer from the template", () => {
    const template = new HexTemplate(layout);
    fc.assert(
      fc.property(images(layout), (list) => {
        for (const image of list) {
          expect(template.bytesOf(image).toString()).toBe(writeIntelHex(image, layout.baseAddress, layout.kept));
        }
      }),
      { numRuns: 40 },
    );
  });

  it("gets the lines of RFC 8785 from the template, whichever fields change", () => {
    fc.assert(
      fc.property(images(layout), (list) => {
        const template = new ValuesTemplate(layout);
        const sink = new ByteSink({ keep: true });
        const device = { derivation: "d", sha256: "ab" };
        const expected = list.map((image, i) => {
          template.add(sink, { ...device, serial: `S${i}` }, image);
          return imageLine({ ...device, serial: `S${i}`, fields: decodeImage(layout, image) });
        });
        expect(Buffer.concat(sink.finish().pieces).toString()).toBe(expected.join(""));
      }),
      { numRuns: 60 },
    );
  });

  it("writes any text of a field as RFC 8785 does", () => {
    const field = layout.fields.find(({ type }) => type === "ascii");
    if (!field) throw new Error("the layout has no text");
    const { at, width } = field;
    const chars = fc.constantFrom(...'aZ0 ~\\"\0\x1f\x7f');
    fc.assert(
      fc.property(fc.array(fc.array(chars, { maxLength: width }), { minLength: 2, maxLength: 4 }), (texts) => {
        const template = new ValuesTemplate(layout);
        const sink = new ByteSink({ keep: true });
        const device = { derivation: "d", serial: "S", sha256: "ab" };
        const expected = texts.map((text) => {
          const image = new Uint8Array(layout.bytes);
          text.forEach((char, i) => {
            image[at + i] = char.charCodeAt(0);
          });
          template.add(sink, device, image);
          return imageLine({ ...device, fields: decodeImage(layout, image) });
        });
        expect(Buffer.concat(sink.finish().pieces).toString()).toBe(expected.join(""));
      }),
      { numRuns: 200 },
    );
  });

  it("gets the same manifest, sums and digests as from whole objects", () => {
    fc.assert(
      fc.property(images(layout), fc.constantFrom(null, "B-00FF", 'ä\u2028 "quoted"'), (list, hardwareId) => {
        const writer = new ContentWriter(layout, { keepValues: true });
        // "-" stands before ".", so that paths and serials are not in the same order.
        const serials = list.map((_, i) => `S${"-0".repeat(i)}`);
        const digests = list.map((image, i) =>
          writer.add({ serial: serials[i] as string, hardwareId, derivation: "d", image }),
        );
        const written = writer.finish(head);
        const hexes = list.map((image) => writeIntelHex(image, layout.baseAddress, layout.kept));
        const values = Buffer.concat(written.values.pieces);
        const manifest = manifestBytes(
          buildManifest({
            ...head,
            images: list.map((image, i) => ({
              serial: serials[i] as string,
              hardwareId,
              bytes: layout.bytes,
              sha256: sha256Hex(imageDigestBytes(layout, image)),
              hex: { path: hexPath(serials[i] as string), sha256: sha256Hex(hexes[i] as string) },
            })),
            values: { path: "images.jsonl", sha256: sha256Hex(values) },
          }),
        );
        expect(written.manifest.toString()).toBe(Buffer.from(manifest).toString());
        expect(written.digest).toBe(sha256Hex(manifest));
        expect(digests.map((one) => one.hexSha256)).toEqual(hexes.map(sha256Hex));
        const files = new Map<string, Uint8Array | string>(hexes.map((hex, i) => [hexPath(serials[i] as string), hex]));
        files.set("manifest.json", manifest).set("images.jsonl", values);
        expect(written.sums.toString()).toBe(sumsText(files));
        expect(writer.lastHex()).toBe(hexes.at(-1));
      }),
      { numRuns: 40 },
    );
  });
});

const head: Omit<Manifest, "format" | "images" | "values"> = {
  lot: "MW20-2609",
  family: { code: "MW-20", revision: 1, sha256: "0a" },
  version: "1.0.0",
  firmware: "2.3.0",
  layout: { version: "1.0.0", sha256: '"images":[]' },
  provenRange: [8.06, 41.9],
  derivations: [],
};

describe("bytes that grow", () => {
  it("come whole and hashed whatever the lengths", () => {
    fc.assert(
      fc.property(fc.array(fc.tuple(fc.string(), fc.nat(400_000)), { maxLength: 8 }), (parts) => {
        const sink = new ByteSink({ keep: true });
        const texts = parts.map(([text, times]) => text.repeat(Math.ceil(times / (text.length + 1))));
        for (const text of texts) sink.addText(text);
        const whole = Buffer.from(texts.join(""));
        expect(sink.length).toBe(Buffer.concat(texts.map((text) => Buffer.from(text))).length);
        const { pieces, length, sha256 } = sink.finish();
        expect(Buffer.concat(pieces).equals(Buffer.concat(texts.map((text) => Buffer.from(text))))).toBe(true);
        expect(length).toBe(whole.length);
        expect(sha256).toBe(sha256Hex(Buffer.concat(pieces)));
      }),
      { numRuns: 40 },
    );
  });

  it("refuse devices that are not in order", () => {
    const [layout] = layouts as [CompiledLayout];
    const writer = new ContentWriter(layout, { keepValues: true });
    const device = { hardwareId: null, derivation: "d", image: new Uint8Array(layout.bytes) };
    writer.add({ ...device, serial: "B" });
    expect(() => writer.add({ ...device, serial: "A" })).toThrow("by serial");
    expect(() => writer.add({ ...device, serial: "B" })).toThrow("by serial");
  });
});
