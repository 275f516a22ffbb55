import { findChecksumWidth } from "@/builders/codec/checksum-algorithm";
import { findFieldWidth } from "@/builders/codec/field-types";
import type { ByteRange, LayoutDocument } from "@/schemas/documents/layout";

/** A named stretch of the image: `at` is its first offset, `end` the offset after its last. */
export interface Extent {
  kind: "field" | "checksum" | "kept" | "reserved";
  name: string;
  at: number;
  end: number;
  /** JSON pointer of what covers it, e.g. `/fields/3`. */
  path: string;
}

/** JSON pointers of a layout's parts. */
export interface LayoutPaths {
  fields: string[];
  checksums: string[];
  kept: string[];
  reserved: string[];
}

/**
 * What is written where, in rising order, for a document of any state: parts whose width is not known are left out.
 * @param paths JSON pointers of the parts, where they are not simply counted.
 */
export function listExtents(
  layout: Pick<LayoutDocument, "fields" | "checksums" | "kept" | "reserved">,
  paths?: LayoutPaths,
): Extent[] {
  const fields = layout.fields.flatMap((field, i) =>
    extent("field", field.name, field.at, findFieldWidth(field), paths?.fields[i] ?? `/fields/${i}`),
  );
  const checksums = layout.checksums.flatMap(({ name, at, algorithm }, i) =>
    extent("checksum", name, at, findChecksumWidth(algorithm), paths?.checksums[i] ?? `/checksums/${i}`),
  );
  const ranges = (["kept", "reserved"] as const).flatMap((kind) =>
    (layout[kind] ?? []).flatMap(([from, to], i) =>
      extent(kind, kind, from, to - from + 1, paths?.[kind][i] ?? `/${kind}/${i}`),
    ),
  );
  return [...fields, ...checksums, ...ranges].sort((a, b) => a.at - b.at || a.end - b.end);
}

function extent(kind: Extent["kind"], name: string, at: number, width: number | undefined, path: string): Extent[] {
  if (width === undefined || width <= 0 || !Number.isInteger(at)) return [];
  return [{ kind, name, at, end: at + width, path }];
}

/** Stretches of the image that nothing covers, in rising order; they hold the fill. */
export function listGaps(extents: readonly Extent[], bytes: number): ByteRange[] {
  const gaps: ByteRange[] = [];
  let next = 0;
  for (const part of extents) {
    if (part.at > next) gaps.push([next, Math.min(part.at, bytes) - 1]);
    next = Math.max(next, part.end);
    if (next >= bytes) return gaps;
  }
  gaps.push([next, bytes - 1]);
  return gaps;
}

/** Kept ranges in rising order, touching or overlapping ones joined, cut to the image. */
export function joinRanges(ranges: readonly ByteRange[], bytes: number): ByteRange[] {
  const joined: ByteRange[] = [];
  const rising = ranges.map(([from, to]): ByteRange => [Math.max(0, from), Math.min(to, bytes - 1)]);
  for (const [from, to] of rising.filter(([from, to]) => from <= to).sort((a, b) => a[0] - b[0])) {
    const last = joined.at(-1);
    if (last && from <= last[1] + 1) last[1] = Math.max(last[1], to);
    else joined.push([from, to]);
  }
  return joined;
}

/** The parts of [0, bytes − 1] outside the given ranges, in rising order. */
export function rangesBetween(ranges: readonly ByteRange[], bytes: number): ByteRange[] {
  const outside: ByteRange[] = [];
  let next = 0;
  for (const [from, to] of joinRanges(ranges, bytes)) {
    if (from > next) outside.push([next, from - 1]);
    next = to + 1;
  }
  if (next < bytes) outside.push([next, bytes - 1]);
  return outside;
}
