import type { CompiledChecksum, CompiledField, CompiledLayout } from "@/builders/codec/compile-layout";
import { isVersionSource } from "@/builders/codec/sources";

/** How the parts of one layout answer to those of another. Parts are counted as decoded: fields, then checksums. */
export interface LayoutPairing {
  from: CompiledLayout;
  to: CompiledLayout;
  /** For each part of the newer layout: which of the older it is, and its fields where their stored integers can be subtracted. */
  matches: { oldIndex: number | null; counted: { from: CompiledField; to: CompiledField } | null }[];
  /** Parts of the older layout that the newer one lacks. */
  gone: number[];
  /** Names in the newer layout of what tells only versions: their numbers, and the checksums. */
  versionNames: ReadonlySet<string>;
  /** 1 for each byte that both layouts give to the same such part, 0 for the others. */
  isVersionByte: Uint8Array;
}

type Part = { kind: "field"; part: CompiledField } | { kind: "checksum"; part: CompiledChecksum };

const known = new WeakMap<CompiledLayout, WeakMap<CompiledLayout, LayoutPairing>>();

/** The pairing of two layouts, worked out once however many images are compared. */
export function pairingOf(from: CompiledLayout, to: CompiledLayout): LayoutPairing {
  const ofFrom = known.get(from) ?? new WeakMap<CompiledLayout, LayoutPairing>();
  known.set(from, ofFrom);
  const found = ofFrom.get(to) ?? pair(from, to);
  ofFrom.set(to, found);
  return found;
}

function pair(from: CompiledLayout, to: CompiledLayout): LayoutPairing {
  const olds = partsOf(from);
  const news = partsOf(to);
  const oldIndexes = matchParts(olds, news);
  const matches = news.map((part, i) => {
    const oldIndex = oldIndexes[i] ?? null;
    return { oldIndex, counted: oldIndex === null ? null : countedFields(olds[oldIndex] as Part, part) };
  });
  const matched = new Set(oldIndexes);
  const gone = olds.flatMap((_, i) => (matched.has(i) ? [] : [i]));
  return { from, to, matches, gone, ...versionPlaces(to, olds, news, oldIndexes) };
}

function partsOf(layout: CompiledLayout): Part[] {
  return [
    ...layout.fields.map((part): Part => ({ kind: "field", part })),
    ...layout.checksums.map((part): Part => ({ kind: "checksum", part })),
  ];
}

/** By name, else by place and reading among what no name matched. */
function matchParts(olds: readonly Part[], news: readonly Part[]): (number | undefined)[] {
  const byName = new Map(olds.map(({ part }, i) => [part.name, i]));
  const indexes = news.map(({ part }) => byName.get(part.name));
  const taken = new Set(indexes);
  const byPlace = new Map(olds.flatMap((old, i) => (taken.has(i) ? [] : [[placeOf(old), i] as const])));
  return indexes.map((index, i) => index ?? byPlace.get(placeOf(news[i] as Part)));
}

/** Where a part lies and how its bytes are read, whatever it is called. */
function placeOf({ kind, part }: Part): string {
  const reading =
    kind === "field"
      ? [...readingOf(part), part.unit, part.source]
      : [part.algorithm, part.over, [...part.forbidden].sort(), part.instead];
  return JSON.stringify([kind, part.at, part.width, part.littleEndian, ...reading]);
}

/** All that turns stored bytes into a value. */
function readingOf({ type, number, bits, scale, bias, names }: CompiledField): unknown[] {
  return [type, number?.min, number?.max, bits, scale, bias, names && [...names.name].sort()];
}

/** Integers of one size, scale and bias; a name has no steps. */
function countedFields(old: Part, part: Part): LayoutPairing["matches"][number]["counted"] {
  if (old.kind !== "field" || part.kind !== "field" || part.part.number?.kind !== "integer") return null;
  if (old.part.names || part.part.names) return null;
  const same = JSON.stringify(readingOf(old.part)) === JSON.stringify(readingOf(part.part));
  return same ? { from: old.part, to: part.part } : null;
}

/**
 * What tells only the version: where all other bytes are equal, a checksum of the same definition can differ only by the
 * version numbers that it covers.
 */
function versionPlaces(
  to: CompiledLayout,
  olds: readonly Part[],
  news: readonly Part[],
  oldIndexes: readonly (number | undefined)[],
): Pick<LayoutPairing, "versionNames" | "isVersionByte"> {
  const versionNames = new Set<string>();
  const isVersionByte = new Uint8Array(to.bytes);
  news.forEach((next, i) => {
    const old = olds[oldIndexes[i] ?? -1];
    if (!old || !tellsVersion(next) || placeOf(old) !== placeOf(next)) return;
    versionNames.add(next.part.name);
    isVersionByte.fill(1, next.part.at, next.part.at + next.part.width);
  });
  return { versionNames, isVersionByte };
}

function tellsVersion({ kind, part }: Part): boolean {
  return kind === "checksum" || (part.source !== null && isVersionSource(part.source));
}
