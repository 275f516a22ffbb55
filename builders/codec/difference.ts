import type { CompiledField, CompiledLayout } from "@/builders/codec/compile-layout";
import { readStored } from "@/builders/codec/decode-field";
import { type DecodedField, decodeImage, imageDigestBytes } from "@/builders/codec/image";
import { type LayoutPairing, pairingOf } from "@/builders/codec/layout-pairing";

/** An image and the layout that it was made with. */
export interface ImageOfLayout {
  layout: CompiledLayout;
  bytes: Uint8Array;
}

export interface FieldDifference {
  name: string;
  /** Null where the image has no such field, or no value in it. */
  from: number | string | null;
  to: number | string | null;
  unit: string | null;
  /** Difference of the stored integers; null where the two are not integers of one type, scale and bias. */
  steps: number | null;
}

export interface ByteDifference {
  /** Offset in the image. */
  at: number;
  /** 0…255, null beyond the end of that image. */
  from: number | null;
  to: number | null;
}

export interface ImageDifference {
  /**
   * `same`: no byte differs. `version-only`: nothing but numbers of package and layout and the checksums over them.
   * `values`: anything else.
   */
  change: "same" | "version-only" | "values";
  fields: FieldDifference[];
  bytes: ByteDifference[];
}

/**
 * What differs between two images, of one layout or of two: by named field as decoded, and byte by byte. Kept ranges
 * are taken as fill. Fields are matched by name, else by place and reading (a field that only got another name), in the
 * order of the newer layout, then those that are gone.
 * @throws AppError `image.wrong_length`
 */
export function compareImages(from: ImageOfLayout, to: ImageOfLayout): ImageDifference {
  const before = imageDigestBytes(from.layout, from.bytes);
  const after = imageDigestBytes(to.layout, to.bytes);
  const bytes = byteDifferences(before, after);
  if (from.layout === to.layout && bytes.length === 0) return { change: "same", fields: [], bytes };
  const pairing = pairingOf(from.layout, to.layout);
  const fields = fieldDifferences(pairing, before, after);
  return { change: changeOf(pairing, fields, bytes), fields, bytes };
}

function byteDifferences(before: Uint8Array, after: Uint8Array): ByteDifference[] {
  const differences: ByteDifference[] = [];
  const length = Math.max(before.length, after.length);
  for (let at = 0; at < length; at++) {
    if (before[at] !== after[at]) differences.push({ at, from: before[at] ?? null, to: after[at] ?? null });
  }
  return differences;
}

function fieldDifferences(pairing: LayoutPairing, before: Uint8Array, after: Uint8Array): FieldDifference[] {
  const olds = decodeImage(pairing.from, before);
  const news = decodeImage(pairing.to, after);
  const differences: FieldDifference[] = [];
  pairing.matches.forEach(({ oldIndex, counted }, i) => {
    const { name, value, unit, raw } = news[i] as DecodedField;
    const old = oldIndex === null ? undefined : olds[oldIndex];
    if (!old) differences.push({ name, from: null, to: value, unit, steps: null });
    else if (!isSameValue(old, { value, unit, raw })) {
      const steps = counted && stepsBetween(counted, before, after);
      differences.push({ name, from: old.value, to: value, unit, steps });
    }
  });
  for (const index of pairing.gone) {
    const { name, value, unit } = olds[index] as DecodedField;
    differences.push({ name, from: value, to: null, unit, steps: null });
  }
  return differences;
}

/** Null where one of the two holds no integer (half bytes that are no digits). */
function stepsBetween(
  counted: { from: CompiledField; to: CompiledField },
  before: Uint8Array,
  after: Uint8Array,
): number | null {
  const from = readStored(counted.from, before);
  const to = readStored(counted.to, after);
  return from === null || to === null ? null : to - from;
}

type Reading = Pick<DecodedField, "value" | "unit" | "raw">;

/** Equal as read, in the same unit; bytes without a value (NaN, unprintable text) are compared as they are stored. */
function isSameValue(a: Reading, b: Reading): boolean {
  return a.unit === b.unit && Object.is(a.value, b.value) && (a.value !== null || a.raw === b.raw);
}

function changeOf(
  { from, to, versionNames, isVersionByte }: LayoutPairing,
  fields: readonly FieldDifference[],
  bytes: readonly ByteDifference[],
): ImageDifference["change"] {
  const sameMemory = from.bytes === to.bytes && isSamePlace(from, to);
  if (!sameMemory || (bytes.length === 0 && fields.length > 0)) return "values";
  if (bytes.length === 0) return "same";
  const onlyVersion =
    fields.every((field) => versionNames.has(field.name)) && bytes.every(({ at }) => isVersionByte[at] === 1);
  return onlyVersion ? "version-only" : "values";
}

/** The same bytes at other addresses are another image. */
function isSamePlace(from: CompiledLayout, to: CompiledLayout): boolean {
  if (from === to) return true;
  if (from.pieces.length !== to.pieces.length) return false;
  return from.pieces.every(({ at, address }, i) => at === to.pieces[i]?.at && address === to.pieces[i]?.address);
}
