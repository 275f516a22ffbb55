import type { CompiledChecksum, CompiledField, CompiledLayout } from "@/builders/codec/compile-layout";
import { readStored } from "@/builders/codec/decode-field";
import { type DecodedField, decodeImage, imageDigestBytes } from "@/builders/codec/image";
import { isVersionSource } from "@/builders/codec/sources";

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
 * are taken as fill. Fields are matched by name, in the order of the newer layout, then those that are gone.
 * @throws AppError `image.wrong_length`
 */
export function compareImages(from: ImageOfLayout, to: ImageOfLayout): ImageDifference {
  const before = imageDigestBytes(from.layout, from.bytes);
  const after = imageDigestBytes(to.layout, to.bytes);
  const bytes = byteDifferences(before, after);
  const sameLayout = from.layout === to.layout;
  if (sameLayout && bytes.length === 0) return { change: "same", fields: [], bytes };
  const fields = fieldDifferences({ layout: from.layout, bytes: before }, { layout: to.layout, bytes: after });
  return { change: changeOf(from.layout, to.layout, fields, bytes), fields, bytes };
}

function byteDifferences(before: Uint8Array, after: Uint8Array): ByteDifference[] {
  const differences: ByteDifference[] = [];
  const length = Math.max(before.length, after.length);
  for (let at = 0; at < length; at++) {
    if (before[at] !== after[at]) differences.push({ at, from: before[at] ?? null, to: after[at] ?? null });
  }
  return differences;
}

type Part = { kind: "field"; part: CompiledField } | { kind: "checksum"; part: CompiledChecksum };

function partsOf(layout: CompiledLayout): Part[] {
  return [
    ...layout.fields.map((part): Part => ({ kind: "field", part })),
    ...layout.checksums.map((part): Part => ({ kind: "checksum", part })),
  ];
}

function fieldDifferences(from: ImageOfLayout, to: ImageOfLayout): FieldDifference[] {
  const olds = partsOf(from.layout);
  const oldDecoded = decodeImage(from.layout, from.bytes);
  const oldIndex = new Map(olds.map(({ part }, i) => [part.name, i]));
  const news = partsOf(to.layout);
  const differences: FieldDifference[] = [];
  decodeImage(to.layout, to.bytes).forEach((after, i) => {
    const at = oldIndex.get(after.name);
    if (at === undefined) {
      differences.push({ name: after.name, from: null, to: after.value, unit: after.unit, steps: null });
      return;
    }
    oldIndex.delete(after.name);
    const before = oldDecoded[at] as DecodedField;
    if (isSameValue(before, after)) return;
    const steps = stepsBetween(olds[at] as Part, from.bytes, news[i] as Part, to.bytes);
    differences.push({ name: after.name, from: before.value, to: after.value, unit: after.unit, steps });
  });
  for (const at of oldIndex.values()) {
    const gone = oldDecoded[at] as DecodedField;
    differences.push({ name: gone.name, from: gone.value, to: null, unit: gone.unit, steps: null });
  }
  return differences;
}

/** Equal as read, in the same unit; bytes without a value (NaN, unprintable text) are compared as they are stored. */
function isSameValue(a: DecodedField, b: DecodedField): boolean {
  return a.unit === b.unit && Object.is(a.value, b.value) && (a.value !== null || a.raw === b.raw);
}

function stepsBetween(old: Part, oldBytes: Uint8Array, part: Part, bytes: Uint8Array): number | null {
  if (old.kind !== "field" || part.kind !== "field" || part.part.number?.kind !== "integer") return null;
  const same =
    old.part.type === part.part.type && old.part.scale === part.part.scale && old.part.bias === part.part.bias;
  return same ? readStored(part.part, bytes) - readStored(old.part, oldBytes) : null;
}

function changeOf(
  from: CompiledLayout,
  to: CompiledLayout,
  fields: readonly FieldDifference[],
  bytes: readonly ByteDifference[],
): ImageDifference["change"] {
  const sameMemory = from.bytes === to.bytes && from.baseAddress === to.baseAddress;
  if (!sameMemory || (bytes.length === 0 && fields.length > 0)) return "values";
  if (bytes.length === 0) return "same";
  const places = from === to ? versionPlaces(from) : sharedPlaces(versionPlaces(from), versionPlaces(to));
  const names = new Set(places.map((place) => place.name));
  const onlyVersion =
    fields.every((field) => names.has(field.name)) &&
    bytes.every(({ at }) => places.some((place) => at >= place.at && at < place.at + place.width));
  return onlyVersion ? "version-only" : "values";
}

interface Place {
  name: string;
  at: number;
  width: number;
  /** How the bytes are read, as one text. */
  reading: string;
}

/**
 * Fields that tell only the version, and the checksums: where all other bytes are equal, a checksum of the same
 * definition can differ only by the version numbers that it covers.
 */
function versionPlaces(layout: CompiledLayout): Place[] {
  const numbers = layout.fields
    .filter((field) => field.source !== null && isVersionSource(field.source))
    .map((f) => ({
      name: f.name,
      at: f.at,
      width: f.width,
      reading: `${f.source} ${f.type} ${f.littleEndian} ${f.scale} ${f.bias}`,
    }));
  const sums = layout.checksums.map((c) => ({
    name: c.name,
    at: c.at,
    width: c.width,
    reading: `${c.algorithm} ${c.littleEndian} ${c.from} ${c.end}`,
  }));
  return [...numbers, ...sums];
}

function sharedPlaces(olds: readonly Place[], news: readonly Place[]): Place[] {
  const known = new Set(olds.map((place) => JSON.stringify(place)));
  return news.filter((place) => known.has(JSON.stringify(place)));
}
