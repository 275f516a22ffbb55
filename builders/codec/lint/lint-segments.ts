import type { ReadableLayout } from "@/builders/codec/lint/lint-shape";
import { listExtents } from "@/builders/codec/memory-map";
import { listSegments, type MemoryPiece } from "@/builders/codec/segments";
import type { Problem } from "@/lib/errors";

/** Where the memory lies in the device: inside 32 bits of address, segments apart, and nothing across an edge of two. */
export function lintSegments({ layout, paths }: ReadableLayout): Problem[] {
  const { memory } = layout;
  const pieces = listSegments(memory);
  const problems = pieces.flatMap((piece) => beyondAddresses(piece, pathOf(piece, layout.memory.segments ?? [])));
  (memory.segments ?? []).forEach(({ at }, i) => {
    const path = `/memory/segments/${i}/at`;
    const twice = (memory.segments ?? []).findIndex((one) => one.at === at) < i;
    if (twice) problems.push({ path, code: "segment.same_place", message: `two segments start at byte ${at}` });
    if (at >= memory.bytes) {
      const message = `the segment starts at byte ${at}, the memory ends at ${memory.bytes - 1}`;
      problems.push({ path, code: "segment.outside_memory", message });
    }
  });
  if (problems.length > 0) return problems;
  return [...overlapping(pieces, layout.memory.segments ?? []), ...acrossEdges(pieces, layout, paths)];
}

type Segments = readonly { at: number }[];

function pathOf({ at }: MemoryPiece, segments: Segments): string {
  const index = segments.findIndex((one) => one.at === at);
  return index < 0 ? "/memory/baseAddress" : `/memory/segments/${index}/baseAddress`;
}

function beyondAddresses({ at, end, address }: MemoryPiece, path: string): Problem[] {
  if (address + end - at <= 2 ** 32) return [];
  return [{ path, code: "memory.beyond_address_space", message: "the memory ends above address FFFFFFFF" }];
}

function overlapping(pieces: readonly MemoryPiece[], segments: Segments): Problem[] {
  const rising = [...pieces].sort((a, b) => a.address - b.address);
  return rising.slice(1).flatMap((piece, i) => {
    const before = rising[i] as MemoryPiece;
    if (piece.address >= before.address + before.end - before.at) return [];
    const message = `bytes ${before.at} and ${piece.at} on lie at the same addresses`;
    return [{ path: pathOf(piece, segments), code: "segment.overlap", message }];
  });
}

function acrossEdges(
  pieces: readonly MemoryPiece[],
  layout: ReadableLayout["layout"],
  paths: ReadableLayout["paths"],
): Problem[] {
  const edges = pieces.slice(1).map((piece) => piece.at);
  return listExtents(layout, paths).flatMap(({ kind, name, at, end, path }) => {
    const edge = edges.find((one) => at < one && end > one);
    if (edge === undefined || kind === "kept" || kind === "reserved") return [];
    const message = `“${name}” runs over byte ${edge}, where another segment starts`;
    return [{ path: `${path}/at`, code: `${kind}.over_segment_edge`, message }];
  });
}
