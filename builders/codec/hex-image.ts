import type { CompiledLayout } from "@/builders/codec/compile-layout";
import type { HexSegment } from "@/builders/codec/intel-hex-read";
import { rangesBetween } from "@/builders/codec/memory-map";
import type { ByteRange } from "@/schemas/documents/layout";

/** An image put together from what a HEX file or a dump says. */
export interface AssembledImage {
  bytes: Uint8Array;
  /** Offsets that the layout writes and the file says nothing about; they hold fill. */
  missing: ByteRange[];
  /** Addresses with bytes outside the layout's memory. */
  outside: { address: number; length: number }[];
}

/** Lays segments over the layout's memory; kept ranges are taken as fill, whatever the file says about them. */
export function assembleImage(layout: CompiledLayout, segments: readonly HexSegment[]): AssembledImage {
  const bytes = new Uint8Array(layout.bytes).fill(layout.fill);
  const covered: ByteRange[] = [...layout.kept];
  const outside: AssembledImage["outside"] = [];
  const end = layout.baseAddress + layout.bytes;
  for (const segment of segments) {
    const last = segment.address + segment.bytes.length;
    const from = Math.max(segment.address, layout.baseAddress);
    const to = Math.min(last, end);
    if (segment.address < layout.baseAddress) {
      outside.push({ address: segment.address, length: Math.min(last, layout.baseAddress) - segment.address });
    }
    if (last > end)
      outside.push({ address: Math.max(segment.address, end), length: last - Math.max(segment.address, end) });
    if (from >= to) continue;
    bytes.set(segment.bytes.subarray(from - segment.address, to - segment.address), from - layout.baseAddress);
    covered.push([from - layout.baseAddress, to - 1 - layout.baseAddress]);
  }
  for (const [from, to] of layout.kept) bytes.fill(layout.fill, from, to + 1);
  return { bytes, missing: rangesBetween(covered, layout.bytes), outside };
}
