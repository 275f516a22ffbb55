import { rangesBetween } from "@/builders/codec/memory-map";
import type { ByteRange, LayoutMemory } from "@/schemas/documents/layout";

/** A stretch of the image and where it lies in the device: offsets `at` up to, not including, `end`; `address` is that of `at`. */
export interface MemoryPiece {
  at: number;
  end: number;
  address: number;
}

/** The pieces of a memory in the order of the image; one where the layout names no segments. */
export function listSegments({
  bytes,
  baseAddress,
  segments = [],
}: Pick<LayoutMemory, "bytes" | "baseAddress" | "segments">): MemoryPiece[] {
  const starts = [{ at: 0, baseAddress }, ...segments].sort((a, b) => a.at - b.at);
  return starts.map(({ at, baseAddress: address }, i) => ({ at, end: starts[i + 1]?.at ?? bytes, address }));
}

/** Address in the device of an offset of the image. */
export function addressAt(pieces: readonly MemoryPiece[], offset: number): number {
  const piece = pieces.findLast((one) => one.at <= offset) ?? { at: 0, address: 0 };
  return piece.address + offset - piece.at;
}

/** Offset in the image of an address; undefined outside the memory. */
export function findOffset(pieces: readonly MemoryPiece[], address: number): number | undefined {
  const piece = pieces.find((one) => address >= one.address && address < one.address + one.end - one.at);
  return piece && piece.at + address - piece.address;
}

/** What is written to the device: the pieces without what it keeps, by rising address. */
export function listWrittenPieces(pieces: readonly MemoryPiece[], kept: readonly ByteRange[]): MemoryPiece[] {
  const bytes = Math.max(0, ...pieces.map((piece) => piece.end));
  const written = rangesBetween(kept, bytes).flatMap(([from, to]) =>
    pieces.flatMap((piece): MemoryPiece[] => {
      const at = Math.max(from, piece.at);
      const end = Math.min(to + 1, piece.end);
      return at < end ? [{ at, end, address: piece.address + at - piece.at }] : [];
    }),
  );
  return written.sort((a, b) => a.address - b.address);
}
