import type { CompiledLayout } from "@/builders/codec/compile-layout";
import type { HexSegment } from "@/builders/codec/files/file-segments";
import { writeHexPieces } from "@/builders/codec/files/intel-hex-write";
import { writeSRecordPieces } from "@/builders/codec/files/s-record-write";
import { rangesBetween } from "@/builders/codec/memory-map";
import type { MemoryPiece } from "@/builders/codec/segments";
import type { ByteRange } from "@/schemas/documents/layout";

/** An image put together from what a HEX file or a dump says. */
export interface AssembledImage {
  bytes: Uint8Array;
  /** Offsets that the layout writes and the file says nothing about; they hold fill. */
  missing: ByteRange[];
  /** Addresses with bytes outside the layout's memory. */
  outside: { address: number; length: number }[];
}

/** An image as Intel HEX: every piece of the layout's memory at its address, without what is kept. */
export function writeImageHex(layout: Pick<CompiledLayout, "written">, bytes: Uint8Array): string {
  return writeHexPieces(bytes, layout.written);
}

/** The same as S-records. */
export function writeImageSRecords(layout: Pick<CompiledLayout, "written">, bytes: Uint8Array): string {
  return writeSRecordPieces(bytes, layout.written);
}

/** Lays segments over the layout's memory; kept ranges are taken as fill, whatever the file says about them. */
export function assembleImage(layout: CompiledLayout, segments: readonly HexSegment[]): AssembledImage {
  const bytes = new Uint8Array(layout.bytes).fill(layout.fill);
  const covered: ByteRange[] = [...layout.kept];
  const pieces = [...layout.pieces].sort((a, b) => a.address - b.address);
  for (const segment of segments) {
    for (const piece of pieces) {
      const from = Math.max(segment.address, piece.address);
      const end = Math.min(segment.address + segment.bytes.length, piece.address + piece.end - piece.at);
      if (from >= end) continue;
      const at = piece.at + from - piece.address;
      bytes.set(segment.bytes.subarray(from - segment.address, end - segment.address), at);
      covered.push([at, at + end - from - 1]);
    }
  }
  for (const [from, to] of layout.kept) bytes.fill(layout.fill, from, to + 1);
  const outside = segments.flatMap((segment) => outsideOf(segment, pieces));
  return { bytes, missing: rangesBetween(covered, layout.bytes), outside };
}

/** @param pieces by rising address. */
function outsideOf(segment: HexSegment, pieces: readonly MemoryPiece[]): AssembledImage["outside"] {
  const outside: AssembledImage["outside"] = [];
  const last = segment.address + segment.bytes.length;
  let next = segment.address;
  for (const { at, end, address } of pieces) {
    if (address > next) outside.push({ address: next, length: Math.min(address, last) - next });
    next = Math.max(next, address + end - at);
    if (next >= last) break;
  }
  if (next < last) outside.push({ address: next, length: last - next });
  return outside.filter((one) => one.length > 0);
}
