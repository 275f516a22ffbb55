import type { ImageValues } from "@/builders/bundle/images-jsonl";
import { sha256Hex } from "@/builders/bundle/sha256";

/** Members of a field of `images.jsonl` that tell bytes of the image. */
export interface RawField {
  name: string;
  at: number;
  raw: string;
}

/** Most bytes that a layout's memory can have. */
export const MOST_BYTES = 65_536;
/** Two fill bytes that erased memories have, then all others. */
const FILLS = [0xff, 0x00, ...Array.from({ length: 254 }, (_, i) => i + 1)];
const FIRST_SAMPLES = 8;
const MOST_SAMPLES = 32;

/** The image that values tell: an image holds fill and its fields, checksums among them, and nothing else. */
export function imageOfValues(fields: readonly RawField[], bytes: number, fill: number): Buffer {
  const image = Buffer.alloc(bytes, fill);
  for (const { at, raw } of fields) image.write(raw, at, "hex");
  return image;
}

/** The fill with which values tell the image of a digest; undefined where none does. */
export function findFill(fields: readonly RawField[], bytes: number, sha256: string): number | undefined {
  const image = imageOfValues(fields, bytes, 0xff);
  // Fields are laid once only: a fill is tried where none lies.
  const blank = [...imageOfValues(fields, bytes, 0x00).entries()].flatMap(([at, byte]) =>
    byte === image[at] ? [] : at,
  );
  return FILLS.find((fill) => {
    for (const at of blank) image[at] = fill;
    return sha256Hex(image) === sha256;
  });
}

/** Whether the fields are bytes inside an image of that length, and no more of them than it has bits. */
export function areFieldsInside(fields: readonly unknown[], bytes: number): fields is RawField[] {
  if (fields.length > 8 * bytes) return false;
  return fields.every((field) => {
    const { at, raw } = (field ?? {}) as Partial<RawField>;
    if (typeof raw !== "string" || typeof at !== "number" || !/^([0-9a-f]{2})+$/.test(raw)) return false;
    return Number.isInteger(at) && at >= 0 && at + raw.length / 2 <= bytes;
  });
}

/** Whether two lines name the same fields at the same places and of the same lengths. */
export function haveSameFields(one: readonly RawField[], other: readonly RawField[]): boolean {
  const isSame = (field: RawField, i: number) => {
    const { name, at, raw } = (other[i] ?? {}) as Partial<RawField>;
    return field.name === name && field.at === at && typeof raw === "string" && field.raw.length === raw.length;
  };
  return one.length === other.length && one.every(isSame);
}

/**
 * Numbers of some lines that tell fields apart: the first ones, and for every field whose bytes differ anywhere one where
 * they do, so that a field that is rarely set isn't taken for fill.
 */
export function chooseSamples(lines: readonly Pick<ImageValues, "fields">[]): number[] {
  const first = lines[0]?.fields ?? [];
  const same = new Set(first.keys());
  const most = Math.min(MOST_SAMPLES, lines.length);
  const samples: number[] = [];
  for (let i = 0; i < lines.length && samples.length < most; i++) {
    const fields = lines[i]?.fields ?? [];
    const differing = [...same].filter((at) => fields[at]?.raw !== first[at]?.raw);
    for (const at of differing) same.delete(at);
    if (i < FIRST_SAMPLES || differing.length > 0) samples.push(i);
  }
  return samples;
}
