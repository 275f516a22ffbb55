/** The job that the build is measured by: images of 256 bytes with 24 fields and a CRC-16, from coefficients in memory to a bundle on the disk. */
import { closeSync, fsyncSync, openSync, writeSync } from "node:fs";
import { type FileHandle, open } from "node:fs/promises";
import { setImmediate } from "node:timers/promises";
import { hexPath } from "@/builders/bundle/bundle";
import { ContentWriter } from "@/builders/bundle/content-writer";
import { HexTemplate } from "@/builders/bundle/hex-template";
import { sha256Hex } from "@/builders/bundle/sha256";
import { notReleasedText, previewVerifyText } from "@/builders/bundle/verify-text";
import { PlainZip, toldOf } from "@/builders/bundle/zip";
import { compileLayout } from "@/builders/codec/compile-layout";
import { encodeImageInto } from "@/builders/codec/image";
import type { ImageSources } from "@/builders/codec/sources";
import { seededRandom } from "@/lib/demo/random";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";

const LOT = "BENCH-LOT";
const FAMILY = { referenceTemperature: 20, capacity: 20, nominalOutput: 2 };
const DERIVATION = "01999999-0000-7000-8000-000000000001";
/** HEX files that are added at a time, as where a bundle is assembled. */
const PAGE = 500;

const from = (name: string, at: number, type: string, source: string, more: Partial<LayoutField> = {}) =>
  ({ name, at, type, value: { from: source }, ...more }) as LayoutField;
const fixed = (name: string, at: number, type: string, value: number | string, more: Partial<LayoutField> = {}) =>
  ({ name, at, type, value: { const: value }, ...more }) as LayoutField;

export const MODEL_LAYOUT: LayoutDocument = {
  format: "trimwright/layout@1",
  family: "BENCH",
  version: "1.0.0",
  firmware: ">=1.0.0 <2.0.0",
  order: 2,
  memory: { bytes: 256, pageBytes: 16, baseAddress: 0, fill: 255, byteOrder: "little" },
  kept: [],
  fields: [
    from("layoutMajor", 0, "u8", "layout.major"),
    from("layoutMinor", 1, "u8", "layout.minor"),
    from("layoutPatch", 2, "u8", "layout.patch"),
    from("serial", 4, "ascii", "device.serial", { length: 20 }),
    from("lotCode", 24, "ascii", "lot.code", { length: 16 }),
    from("packageMajor", 40, "u16", "package.major"),
    from("packageMinor", 42, "u16", "package.minor"),
    from("packagePatch", 44, "u16", "package.patch"),
    from("tempOffset", 48, "f32", "coefficients.tempOffset", { unit: "°C", min: -500, max: 500 }),
    from("tempSlope", 52, "f32", "coefficients.tempSlope", { unit: "°C/1", min: 0.001, max: 1 }),
    from("zero", 56, "i32", "coefficients.zero", { scale: 1e-7, unit: "mV/V", min: -0.5, max: 0.5 }),
    from("zeroTc", 60, "i24", "coefficients.zeroTc", { scale: 1e-10, unit: "mV/V/K", min: -8e-4, max: 8e-4 }),
    from("zeroTc2", 64, "f32", "coefficients.zeroTc2", { unit: "mV/V/K²" }),
    from("gain", 68, "u32", "coefficients.gain", { scale: 1e-9, unit: "1", min: 0.5, max: 2 }),
    from("gainTc", 72, "f64", "coefficients.gainTc", { unit: "1/K" }),
    from("gainTc2", 80, "f32", "coefficients.gainTc2", { unit: "1/K²" }),
    from("refTemperature", 84, "i16", "family.referenceTemperature", { scale: 0.01, unit: "°C" }),
    from("capacity", 88, "f32", "family.capacity", { unit: "kg" }),
    from("nominalOutput", 92, "f32", "family.nominalOutput", { unit: "mV/V" }),
    fixed("marker", 96, "u32", 305_419_896),
    fixed("kind", 100, "bytes", "a1b2c3d4"),
    fixed("filterTaps", 104, "u16", 16),
    fixed("sampleRate", 106, "u16", 50, { unit: "Hz" }),
    fixed("options", 108, "u8", 3),
  ],
  checksums: [{ name: "imageCrc", at: 254, algorithm: "CRC-16/IBM-3740", over: [0, 253] }],
};

export interface ModelDevice {
  serial: string;
  coefficients: Record<string, number>;
}

/** The same devices at every call. */
export function modelDevices(count: number): ModelDevice[] {
  const random = seededRandom(count);
  return Array.from({ length: count }, (_, i) => ({
    serial: `BENCH-${String(i + 1).padStart(6, "0")}`,
    coefficients: {
      tempOffset: random.normal(-40, 0.4),
      tempSlope: random.normal(0.0625, 2e-4),
      zero: random.normal(0, 0.02),
      zeroTc: random.normal(0, 2e-5),
      zeroTc2: random.normal(0, 2e-7),
      gain: random.normal(1, 0.004),
      gainTc: random.normal(3e-5, 2e-7),
      gainTc2: random.normal(0, 3e-9),
    },
  }));
}

const sourcesOf = ({ serial, coefficients }: ModelDevice): ImageSources => ({
  device: { serial },
  lot: { code: LOT },
  layout: { major: 1, minor: 0, patch: 0 },
  package: { major: 1, minor: 0, patch: 0 },
  coefficients: coefficients as unknown as ImageSources["coefficients"],
  family: FAMILY,
});

const head = {
  lot: LOT,
  family: { code: "BENCH", revision: 1, sha256: "0".repeat(64) },
  version: "1.0.0",
  firmware: "1.0.0",
  layout: { version: "1.0.0", sha256: "0".repeat(64) },
  provenRange: [8, 42] as [number, number],
  derivations: [],
};

const layout = compileLayout(MODEL_LAYOUT);

/** Encodes every device, writes HEX, digests and values: what comes before the bundle. */
export function composeModel(devices: readonly ModelDevice[]) {
  const writer = new ContentWriter(layout, { keepValues: true });
  const memory = Buffer.allocUnsafe(devices.length * layout.bytes);
  const images = devices.map((device, i) => {
    const image = memory.subarray(i * layout.bytes, (i + 1) * layout.bytes);
    encodeImageInto(image, layout, sourcesOf(device));
    const { serial } = device;
    writer.add({ serial, hardwareId: null, derivation: DERIVATION, image });
    return { serial, image };
  });
  return { writer, images };
}

/**
 * The whole job: a bundle at `path`, flushed to the disk. What is ready is written and flushed while the rest is composed, as
 * a worker would do that has anything else to do.
 * @returns the package digest
 */
export async function buildModel(devices: readonly ModelDevice[], path: string): Promise<string> {
  const file = new BehindFile(path);
  const { writer, images } = composeModel(devices);
  const content = writer.finish(head);
  const zip = new PlainZip();
  const add = (name: string, pieces: readonly Uint8Array[], told = toldOf(pieces)) =>
    file.add(zip.head(name, told), ...pieces);
  add("NOT-RELEASED.txt", [Buffer.from(notReleasedText({ lot: LOT, version: "1.0.0" }))]);
  add("SHA256SUMS", [content.sums]);
  add("VERIFY.txt", [Buffer.from(previewVerifyText())]);
  const { pieces, crc32, length } = content.values;
  add("images.jsonl", pieces, { crc32, size: length });
  const hex = new HexTemplate(layout);
  for (let at = 0; at < images.length; at += PAGE) {
    await file.turn();
    const page = images.slice(at, at + PAGE);
    file.add(zip.entries(page.map(({ serial, image }) => ({ path: hexPath(serial), content: hex.bytesOf(image) }))));
  }
  add("manifest.json", [content.manifest]);
  file.add(...zip.end());
  await file.close();
  return content.digest;
}

/** The floor: file after file, its SHA-256 and its bytes into the bundle, which is flushed to the disk. */
export function floorOf(files: Iterable<Uint8Array>, path: string): void {
  const bundle = openSync(path, "w");
  for (const content of files) {
    sha256Hex(content);
    writeAll(bundle, content);
  }
  fsyncSync(bundle);
  closeSync(bundle);
}

/** The least that any program could take: as {@link floorOf}, but for all bytes that are written at once and lie ready. */
export function bareFloorOf(files: Iterable<Uint8Array>, zip: Uint8Array, path: string): void {
  for (const content of files) sha256Hex(content);
  const bundle = openSync(path, "w");
  writeAll(bundle, zip);
  fsyncSync(bundle);
  closeSync(bundle);
}

function writeAll(file: number, content: Uint8Array): void {
  for (let at = 0; at < content.length; ) at += writeSync(file, content, at);
}

/** A file that is written and flushed behind its caller's back, in the order in which its bytes are given. */
class BehindFile {
  readonly #handle: Promise<FileHandle>;
  #waiting: Uint8Array[] = [];
  /** What runs now; undefined where nothing does. */
  #running: Promise<void> | undefined;

  constructor(path: string) {
    this.#handle = open(path, "w");
  }

  /** The bytes may no longer change. */
  add(...parts: Uint8Array[]): void {
    this.#waiting.push(...parts);
  }

  /** Lets the file go on with what was given to it. */
  async turn(): Promise<void> {
    this.#running ??= this.#write();
    await setImmediate();
  }

  async close(): Promise<void> {
    await this.#running;
    await this.#write();
    await (await this.#handle).close();
  }

  async #write(): Promise<void> {
    const handle = await this.#handle;
    const parts = this.#waiting;
    this.#waiting = [];
    const { bytesWritten } = await handle.writev(parts);
    if (bytesWritten !== parts.reduce((sum, part) => sum + part.length, 0))
      throw new Error("the disk took a part only");
    await handle.datasync();
    this.#running = undefined;
  }
}
