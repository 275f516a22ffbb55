import { type HexOfImage, jointSymbols } from "@/builders/bundle/joint-symbols";
import { type HexPart, type HexRun, RunPlacer } from "@/builders/bundle/place-runs";
import { refuse } from "@/builders/bundle/refuse";
import { sha256Hex } from "@/builders/bundle/sha256";
import {
  areFieldsInside,
  findFill,
  haveSameFields,
  imageOfValues,
  type RawField,
} from "@/builders/bundle/values-image";
import type { HexSegment } from "@/builders/codec/files/file-segments";

/** All that a bundle says of one image. */
export interface DescribedImage {
  serial: string;
  /** Of its HEX. */
  path: string;
  /** Length, from the manifest. */
  bytes: number;
  /** Of the image, from the manifest. */
  sha256: string;
  fields: readonly RawField[];
  /** What its HEX holds, by rising address. */
  segments: readonly HexSegment[];
}

/** Samples that the places are looked for in one by one, where they don't fit together. */
const MOST_TRIES = 4;

/**
 * How the HEX files of a package become images. A bundle has no layout, but all its images share one: the places where runs
 * of HEX lie in the image, and the fill of what is kept, are learned from a few images and have to hold for every one.
 */
export class ImageOfHex {
  readonly #first: DescribedImage;
  readonly #fill: number;
  readonly #runs: readonly HexRun[];
  /** Undefined where it takes too long to tell. */
  readonly #parts: readonly HexPart[] | undefined = undefined;

  /**
   * @param samples images of the package, the more different the better; none is trusted.
   * @throws AppError `bundle.not_verified` where no places, or no fill, give the image that the manifest names.
   */
  constructor(samples: readonly [DescribedImage, ...DescribedImage[]]) {
    const { model, fill, usable } = usableSamples(samples);
    this.#first = model;
    this.#fill = fill;
    this.#runs = runsOf(model.segments);
    const found = findParts(usable, (devices) => this.#placerOf(devices));
    if (found === "none") this.#refuseSamples(samples);
    this.#parts = found === "unknown" ? undefined : found;
  }

  /** Whether the digest of an image can be computed from its HEX. */
  get isPlaced(): boolean {
    return this.#parts !== undefined;
  }

  /**
   * Holds an image against its HEX and its values: the digest of what the HEX holds is the manifest's, and every field stands
   * in it as its raw bytes say. Without places the digest is that of the values, and the HEX has to hold the same bytes in some order.
   * @throws AppError `bundle.not_verified`
   */
  assertHolds(image: DescribedImage): void {
    const { serial, path, bytes, fields, segments } = image;
    if (bytes !== this.#first.bytes) refuse(`The image of ${serial} is not as long as that of ${this.#first.serial}`);
    if (!haveSameFields(this.#first.fields, fields))
      refuse(`The values of ${serial} are not of the same fields as those of ${this.#first.serial}`);
    if (!haveSameAddresses(this.#first.segments, segments))
      refuse(`${path} does not lie at the same addresses as ${this.#first.path}`);
    const held = this.#parts ? this.#assemble(this.#parts, image) : imageOfValues(fields, bytes, this.#fill);
    if (sha256Hex(held) !== image.sha256) refuse(this.#parts ? anotherImage(image) : otherValues(image));
    if (!this.#parts && !isSameBytes(held, dataOf(segments), this.#fill)) refuse(anotherImage(image));
    const digits = held.toString("hex");
    if (!fields.every(({ at, raw }) => digits.startsWith(raw, 2 * at)))
      refuse(`The values of ${serial} are not what ${path} holds`);
  }

  #assemble(parts: readonly HexPart[], { bytes, segments }: DescribedImage): Buffer {
    const image = Buffer.alloc(bytes, this.#fill);
    const hex = dataOf(segments);
    for (const { from, end, at } of parts) image.set(hex.subarray(from, end), at);
    return image;
  }

  #placerOf(devices: readonly [HexOfImage, ...HexOfImage[]]): RunPlacer {
    const fields = this.#first.fields.map(({ at, raw }) => ({ at, end: at + raw.length / 2 }));
    return new RunPlacer({ ...jointSymbols(devices), runs: this.#runs, fields });
  }

  /** Nothing fits: names the sample that shows it even without places, if there is one. */
  #refuseSamples(samples: readonly DescribedImage[]): never {
    for (const sample of samples) this.assertHolds(sample);
    return refuse(`What ${this.#first.path} holds is not, in any order, the image of ${this.#first.serial}`);
  }
}

/**
 * The plainest way that fits all samples, or else one of them: a HEX whose bytes changed places must not lead to a way that is
 * less plain for all, and is refused by what the others tell. Cuts are believed only where several images agree.
 */
function findParts(
  usable: readonly [HexOfImage, ...HexOfImage[]],
  placerOf: (devices: readonly [HexOfImage, ...HexOfImage[]]) => RunPlacer,
): HexPart[] | "none" | "unknown" {
  const all = placerOf(usable);
  const each = usable.length > 1 ? usable.slice(0, MOST_TRIES).map((one) => placerOf([one])) : [];
  for (const way of ["one base", "whole runs"] as const) {
    const found = [all, ...each].map((placer) => placer.find(way));
    const parts = found.find((one) => typeof one === "object");
    if (parts) return parts;
    if (way === "whole runs" && found.includes("unknown")) return "unknown";
  }
  for (const cuts of usable.length > 1 ? [1, 2] : []) {
    const parts = all.find({ cuts });
    if (typeof parts === "object") return parts;
  }
  return "none";
}

interface UsableSamples {
  model: DescribedImage;
  fill: number;
  usable: [HexOfImage, ...HexOfImage[]];
}

/** Samples whose values tell the image of their digest and whose HEX holds its bytes. @throws AppError where there is none */
function usableSamples(samples: readonly [DescribedImage, ...DescribedImage[]]): UsableSamples {
  for (const model of samples.slice(0, MOST_TRIES)) {
    if (!areFieldsInside(model.fields, model.bytes)) continue;
    const fill = findFill(model.fields, model.bytes, model.sha256);
    if (fill === undefined) continue;
    const [first, ...more] = samples.flatMap((sample) => hexOfImage(sample, model, fill) ?? []);
    if (first) return { model, fill, usable: [first, ...more] };
    refuse(anotherImage(model));
  }
  return refuse(otherValues(samples[0]));
}

/** Image and HEX of a sample, where both are as the model's and fit together. */
function hexOfImage(sample: DescribedImage, model: DescribedImage, fill: number): HexOfImage | undefined {
  const { bytes, fields, sha256, segments } = sample;
  const isAlike = bytes === model.bytes && haveSameFields(model.fields, fields);
  if (!isAlike || !haveSameAddresses(model.segments, segments)) return undefined;
  const image = imageOfValues(fields, bytes, fill);
  const hex = dataOf(segments);
  return sha256Hex(image) === sha256 && isSameBytes(image, hex, fill) ? { image, hex } : undefined;
}

function anotherImage({ serial, path }: DescribedImage): string {
  return `${path} holds another image of ${serial} than the manifest names`;
}

function otherValues({ serial }: DescribedImage): string {
  return `The values of ${serial} are not those of the image that the manifest names`;
}

function runsOf(segments: readonly HexSegment[]): HexRun[] {
  let next = 0;
  return segments.map(({ address, bytes }) => {
    const from = next;
    next += bytes.length;
    return { address, from, end: next };
  });
}

function dataOf(segments: readonly HexSegment[]): Uint8Array {
  const [whole, ...more] = segments;
  return whole && more.length === 0 ? whole.bytes : Buffer.concat(segments.map(({ bytes }) => bytes));
}

function haveSameAddresses(one: readonly HexSegment[], other: readonly HexSegment[]): boolean {
  const isSame = ({ address, bytes }: HexSegment, i: number) =>
    address === other[i]?.address && bytes.length === other[i]?.bytes.length;
  return one.length === other.length && one.every(isSame);
}

/** Whether an image has the bytes of its HEX, in any order, and otherwise fill. */
function isSameBytes(image: Uint8Array, hex: Uint8Array, fill: number): boolean {
  const counts = new Int32Array(256);
  for (const byte of image) counts[byte] = (counts[byte] as number) + 1;
  for (const byte of hex) counts[byte] = (counts[byte] as number) - 1;
  counts[fill] = (counts[fill] as number) - (image.length - hex.length);
  return hex.length <= image.length && counts.every((count) => count === 0);
}
