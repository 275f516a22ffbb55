import intelHex from "intel-hex";
import { upperAddressRecord } from "@/builders/codec/files/intel-hex-write";
import { joinRanges } from "@/builders/codec/memory-map";
import { findOffset, listSegments, type MemoryPiece } from "@/builders/codec/segments";
import { AppError } from "@/lib/errors";
import type { ByteRange } from "@/schemas/documents/layout";

/** The memory that a HEX file has to fill. */
export interface HexTarget {
  bytes: number;
  baseAddress: number;
  fill: number;
  kept: readonly ByteRange[];
  /** Where the memory is not in one piece. */
  pieces?: readonly MemoryPiece[];
}

/**
 * The image in a HEX file as the npm package `intel-hex` reads it: a second opinion that shares no code with our writer.
 * That package reads into one flat buffer from address 0 and says nothing of overlaps and gaps, so every segment is read
 * by itself, its addresses moved to start at its 64 K block, and the extents are checked here first: every record inside
 * the memory, no byte twice, none but kept ones missing, nothing after the end record.
 * @returns the image with kept ranges as fill.
 * @throws AppError `hex.outside_memory`, `hex.overlap`, `hex.incomplete`, `hex.over_kept`, `hex.unreadable`
 */
export function readIndependently(hex: string, target: HexTarget): Uint8Array {
  const pieces = target.pieces ?? listSegments({ bytes: target.bytes, baseAddress: target.baseAddress });
  assertExtents(hex, target, pieces);
  const whole = new Uint8Array(target.bytes).fill(target.fill);
  const texts = pieces.length === 1 ? [hex] : splitByPieces(hex, pieces);
  pieces.forEach((piece, i) => {
    whole.set(readPiece(texts[i] as string, piece), piece.at);
  });
  for (const [from, to] of target.kept) whole.fill(target.fill, from, to + 1);
  return whole;
}

function readPiece(hex: string, { at, end, address }: MemoryPiece): Uint8Array {
  const upper = Math.floor(address / 0x10000);
  const moved = hex.replace(/^:02000004([0-9A-F]{4})[0-9A-F]{2}\n/gm, (_, high: string) =>
    upperAddressRecord(Number.parseInt(high, 16) - upper),
  );
  // One byte more than the image, or the package stops before the end record.
  return new Uint8Array(parse(moved, end - at + 1, address % 0x10000).subarray(0, end - at));
}

/** A file of its own for each segment. Every record lies in one, as the extents were checked. */
function splitByPieces(hex: string, pieces: readonly MemoryPiece[]): string[] {
  const texts = pieces.map(() => "");
  const uppers = pieces.map(() => 0);
  let upper = 0;
  for (const line of hex.split("\n")) {
    const type = line.slice(7, 9);
    if (type === "04") upper = Number.parseInt(line.slice(9, 13), 16);
    if (type !== "00") continue;
    const offset = findOffset(pieces, upper * 0x10000 + Number.parseInt(line.slice(3, 7), 16)) as number;
    const i = pieces.findLastIndex((piece) => piece.at <= offset);
    if (uppers[i] !== upper) texts[i] += upperAddressRecord(upper);
    uppers[i] = upper;
    texts[i] += `${line}\n`;
  }
  return texts.map((text) => `${text}:00000001FF\n`);
}

/** Where the independent reading differs from the image first; undefined where they are equal. @throws as {@link readIndependently} */
export function findReadDifference(hex: string, image: Uint8Array, target: HexTarget): number | undefined {
  const read = readIndependently(hex, target);
  const at = image.findIndex((byte, i) => read[i] !== byte);
  if (at >= 0) return at;
  return read.length === image.length ? undefined : Math.min(read.length, image.length);
}

function parse(hex: string, bytes: number, offset: number): Uint8Array {
  try {
    return intelHex.parse(hex, bytes, offset).data;
  } catch (cause) {
    throw new AppError(
      "hex.unreadable",
      { message: cause instanceof Error ? cause.message : "not readable" },
      { cause },
    );
  }
}

function assertExtents(hex: string, target: HexTarget, pieces: readonly MemoryPiece[]): void {
  const seen = new Uint8Array(target.bytes);
  let upper = 0;
  let ended = false;
  hex.split("\n").forEach((record, i) => {
    if (record === "" && ended) return;
    const [, length = "", low = "", type = "", data = ""] =
      /^:([0-9A-F]{2})([0-9A-F]{4})([0-9A-F]{2})([0-9A-F]*)[0-9A-F]{2}$/.exec(record) ?? [];
    const line = i + 1;
    if (ended || !["00", "01", "04"].includes(type)) throw new AppError("hex.unreadable", { line });
    if (type === "04") upper = Number.parseInt(data, 16);
    if (type === "01") ended = true;
    if (type === "00") {
      const address = upper * 0x10000 + Number.parseInt(low, 16);
      markBytes(seen, pieces, { address, length: Number.parseInt(length, 16), line });
    }
  });
  for (const [from, to] of joinRanges(target.kept, target.bytes)) {
    const written = seen.subarray(from, to + 1).indexOf(1);
    if (written >= 0)
      throw new AppError("hex.over_kept", { at: from + written, message: "A kept byte is in the file" });
    seen.fill(1, from, to + 1);
  }
  const missing = seen.indexOf(0);
  if (missing >= 0)
    throw new AppError("hex.incomplete", { at: missing, message: `Byte ${missing} is not in the file` });
}

function markBytes(
  seen: Uint8Array,
  pieces: readonly MemoryPiece[],
  { address, length, line }: { address: number; length: number; line: number },
): void {
  const at = findOffset(pieces, address);
  const piece = at === undefined ? undefined : pieces.findLast((one) => one.at <= at);
  if (at === undefined || !piece || at + length > piece.end)
    throw new AppError("hex.outside_memory", { line, address });
  if (seen.subarray(at, at + length).includes(1)) throw new AppError("hex.overlap", { line, at });
  seen.fill(1, at, at + length);
}
