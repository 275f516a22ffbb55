import { findAlgorithmBits, rangesOf } from "@/builders/codec/checksum-algorithm";
import type { ReadableLayout } from "@/builders/codec/lint/lint-shape";
import { type Extent, listExtents } from "@/builders/codec/memory-map";
import type { Problem } from "@/lib/errors";
import type { ByteRange, LayoutChecksum } from "@/schemas/documents/layout";

type Add = (tail: string, reason: string, message: string) => void;

/** What stands against computing the checksums: algorithms, ranges, their order, what is forbidden. */
export function lintChecksums({ layout, paths }: ReadableLayout): Problem[] {
  const parts = listExtents(layout, paths);
  const stored = new Map(parts.filter((part) => part.kind === "checksum").map((part) => [part.path, part]));
  const kept = parts.filter((part) => part.kind === "kept");
  return layout.checksums.flatMap((checksum, i) => {
    const path = paths.checksums[i] as string;
    const later = layout.checksums.slice(i + 1).map(({ name }, j) => ({
      name,
      place: stored.get(paths.checksums[i + 1 + j] as string),
    }));
    const found: Problem[] = [];
    const add: Add = (tail, reason, message) =>
      found.push({ path: `${path}/${tail}`, code: `checksum.${reason}`, message });
    lintAlgorithm(checksum, add);
    lintForbidden(checksum, add);
    lintRanges(checksum, layout.memory.bytes, add);
    const covers = (part: Extent | undefined) => part !== undefined && isCovered(part, checksum);
    if (covers(stored.get(path))) add("over", "covers_itself", `“${checksum.name}” covers its own place`);
    if (kept.some(covers)) add("over", "over_kept", `“${checksum.name}” covers bytes that belong to the device`);
    for (const { name, place } of later) {
      if (!covers(place)) continue;
      add("over", "covers_later", `“${checksum.name}” covers “${name}”, which is computed after it`);
    }
    return found;
  });
}

function isCovered({ at, end }: Extent, { over }: LayoutChecksum): boolean {
  return rangesOf(over).some(([from, to]) => at <= to && end > from);
}

function lintAlgorithm({ name, algorithm }: LayoutChecksum, add: Add): void {
  const bits = findAlgorithmBits(algorithm);
  if (bits === undefined) {
    const message =
      typeof algorithm === "string"
        ? `“${algorithm}” is not in the catalogue`
        : `“${name}” has a size that is not offered: CRC 8, 16, 24, 32; sum 8, 16, 32; exclusive or 8`;
    add("algorithm", "unknown_algorithm", message);
    return;
  }
  if (typeof algorithm === "string" || !("poly" in algorithm)) return;
  for (const key of ["poly", "init", "xorout"] as const) {
    if (Number.parseInt(algorithm[key], 16) < 2 ** bits) continue;
    add(`algorithm/${key}`, "parameter_too_wide", `“${key}” of “${name}” has more than ${bits} bits`);
  }
  if (Number.parseInt(algorithm.poly, 16) % 2 === 1) return;
  const message = `“poly” of “${name}” has no last term; give it highest power first and not turned round`;
  add("algorithm/poly", "poly_even", message);
}

/** Forbidden values and what is stored instead: neither wider than the checksum, and the second none of the first. */
function lintForbidden({ name, algorithm, forbid = [], instead }: LayoutChecksum, add: Add): void {
  const bits = findAlgorithmBits(algorithm);
  if (bits === undefined) return;
  const tooWide = (hex: string) => Number.parseInt(hex, 16) >= 2 ** bits;
  forbid.forEach((hex, i) => {
    if (tooWide(hex)) add(`forbid/${i}`, "parameter_too_wide", `“${hex}” has more bits than “${name}”`);
  });
  if (instead === undefined) return;
  const forbidden = forbid.map((hex) => Number.parseInt(hex, 16));
  if (tooWide(instead)) add("instead", "parameter_too_wide", `“${instead}” has more bits than “${name}”`);
  if (forbid.length === 0) add("instead", "nothing_forbidden", `“${name}” forbids nothing that it would stand for`);
  if (forbidden.includes(Number.parseInt(instead, 16))) {
    add("instead", "instead_forbidden", `“${name}” forbids “${instead}” itself`);
  }
}

function lintRanges({ name, over }: LayoutChecksum, bytes: number, add: Add): void {
  const ranges = rangesOf(over);
  const single = ranges[0] === over;
  ranges.forEach((range, i) => {
    const tail = single ? "over" : `over/${i}`;
    if (range[0] > range[1]) add(tail, "range_invalid", "the range ends before it starts");
    if (range[1] >= bytes) add(tail, "range_outside_memory", `the memory ends at ${bytes - 1}`);
    const earlier = ranges.slice(0, i).find((one) => shareBytes(one, range));
    if (!earlier) return;
    // A byte that is taken twice can cancel itself out, so its damage would not be noticed.
    add(tail, "ranges_overlap", `“${name}” runs through bytes of [${earlier.join(", ")}] twice`);
  });
}

const shareBytes = (a: ByteRange, b: ByteRange) => a[0] <= b[1] && b[0] <= a[1];
