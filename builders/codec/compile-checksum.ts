import { findChecksumWidth, makeChecksum, rangesOf } from "@/builders/codec/checksum-algorithm";
import type { Crc } from "@/builders/codec/crc";
import { algorithmText } from "@/lib/domain/checksum-text";
import type { ByteRange, LayoutChecksum, LayoutDocument } from "@/schemas/documents/layout";

export interface CompiledChecksum {
  name: string;
  at: number;
  width: number;
  littleEndian: boolean;
  /** In the order in which they are run through. */
  over: readonly ByteRange[];
  /** In words; equal for equal definitions. */
  algorithm: string;
  /** The check over an image's covered bytes, as an unsigned number, whatever is forbidden. */
  compute: (bytes: Uint8Array) => number;
  forbidden: ReadonlySet<number>;
  /** What is stored for a forbidden value; null where such an image is refused. */
  instead: number | null;
}

export function compileChecksum(checksum: LayoutChecksum, layout: LayoutDocument): CompiledChecksum {
  const over = rangesOf(checksum.over);
  return {
    name: checksum.name,
    at: checksum.at,
    width: findChecksumWidth(checksum.algorithm) as number,
    littleEndian: (checksum.byteOrder ?? layout.memory.byteOrder) === "little",
    over,
    algorithm: algorithmText(checksum.algorithm),
    compute: overRanges(makeChecksum(checksum.algorithm), over),
    forbidden: new Set((checksum.forbid ?? []).map((hex) => Number.parseInt(hex, 16))),
    instead: checksum.instead === undefined ? null : Number.parseInt(checksum.instead, 16),
  };
}

/** Several ranges are run through as if their bytes stood one behind the other. */
function overRanges(check: Crc, ranges: readonly ByteRange[]): (bytes: Uint8Array) => number {
  const [first] = ranges;
  if (ranges.length === 1 && first) {
    const [from, last] = first;
    return (bytes) => check(bytes, from, last + 1);
  }
  const joined = new Uint8Array(ranges.reduce((sum, [from, to]) => sum + to - from + 1, 0));
  return (bytes) => {
    let at = 0;
    for (const [from, to] of ranges) {
      joined.set(bytes.subarray(from, to + 1), at);
      at += to - from + 1;
    }
    return check(joined, 0, at);
  };
}

/** What has to stand in the image; undefined where the computed value is forbidden and nothing is named instead. */
export function findStoredSum(sum: CompiledChecksum, computed: number): number | undefined {
  if (!sum.forbidden.has(computed)) return computed;
  return sum.instead ?? undefined;
}
