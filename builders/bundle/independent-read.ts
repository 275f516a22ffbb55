import intelHex from "intel-hex";
import { upperAddressRecord } from "@/builders/codec/intel-hex-write";
import { joinRanges } from "@/builders/codec/memory-map";
import { AppError } from "@/lib/errors";
import type { ByteRange } from "@/schemas/documents/layout";

/** The memory that a HEX file has to fill. */
export interface HexTarget {
  bytes: number;
  baseAddress: number;
  fill: number;
  kept: readonly ByteRange[];
}

/**
 * The image in a HEX file as the npm package `intel-hex` reads it: a second opinion that shares no code with our writer.
 * That package reads into one flat buffer from address 0 and says nothing of overlaps and gaps, so the addresses are
 * moved to start at the memory's 64 K block, and the extents are checked here first: every record inside the memory, no byte twice,
 * none but kept ones missing, nothing after the end record.
 * @returns the image with kept ranges as fill.
 * @throws AppError `hex.outside_memory`, `hex.overlap`, `hex.incomplete`, `hex.over_kept`, `hex.unreadable`
 */
export function readIndependently(hex: string, target: HexTarget): Uint8Array {
  const upper = Math.floor(target.baseAddress / 0x10000);
  const offset = target.baseAddress % 0x10000;
  assertExtents(hex, target);
  const moved = hex.replace(/^:02000004([0-9A-F]{4})[0-9A-F]{2}\n/gm, (_, high: string) =>
    upperAddressRecord(Number.parseInt(high, 16) - upper),
  );
  // One byte more than the image, or the package stops before the end record.
  const image = new Uint8Array(parse(moved, target.bytes + 1, offset).subarray(0, target.bytes));
  const whole = new Uint8Array(target.bytes).fill(target.fill);
  whole.set(image);
  for (const [from, to] of target.kept) whole.fill(target.fill, from, to + 1);
  return whole;
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

function assertExtents(hex: string, target: HexTarget): void {
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
    if (type === "00") markBytes(seen, upper * 0x10000 + Number.parseInt(low, 16) - target.baseAddress, length, line);
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

function markBytes(seen: Uint8Array, at: number, length: string, line: number): void {
  const end = at + Number.parseInt(length, 16);
  if (at < 0 || end > seen.length) throw new AppError("hex.outside_memory", { line, at });
  if (seen.subarray(at, end).includes(1)) throw new AppError("hex.overlap", { line, at });
  seen.fill(1, at, end);
}
