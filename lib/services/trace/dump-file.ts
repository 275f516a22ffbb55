import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { assembleImage } from "@/builders/codec/files/hex-image";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { readSRecords } from "@/builders/codec/files/s-record-read";
import { addressAt } from "@/builders/codec/segments";
import { AppError } from "@/lib/errors";

/** A memory dump as read: raw from the base address on, or pieces with their addresses. */
export type DumpFile = { raw: Buffer } | { file: Pick<ReturnType<typeof readIntelHex>, "segments"> };

/**
 * Reads a dump. Text is Intel HEX, or S-records where it begins with an S.
 * @throws AppError `hex.*` and `srec.*` with the line, `dump.empty`
 */
export function readDumpFile({ format, bytes }: { format: "hex" | "raw"; bytes: Buffer }): DumpFile {
  if (bytes.length === 0) throw new AppError("dump.empty", { message: "The file is empty. Read the memory again." });
  if (format === "raw") return { raw: bytes };
  const text = bytes.toString("latin1");
  return { file: /^\s*S/i.test(text) ? readSRecords(text) : readIntelHex(text) };
}

/** The layout's memory out of a dump, null where the dump does not hold all of it; kept bytes may be missing. */
export function memoryOf(layout: CompiledLayout, dump: DumpFile): Uint8Array | null {
  if ("raw" in dump) return dump.raw.length === layout.bytes ? dump.raw : null;
  const { bytes, missing } = assembleImage(layout, dump.file.segments);
  return missing.length === 0 ? bytes : null;
}

/** Why a dump does not hold a layout's memory, in words. */
export function wrongShape(layout: CompiledLayout, dump: DumpFile): AppError {
  if ("raw" in dump) {
    const facts = { expected: layout.bytes, actual: dump.raw.length };
    return new AppError("dump.wrong_length", {
      ...facts,
      message: `A raw dump of this device has ${facts.expected} bytes; this one has ${facts.actual}. Read the whole memory, or send Intel HEX.`,
    });
  }
  const { missing } = assembleImage(layout, dump.file.segments);
  const address = (offset: number) =>
    `0x${addressAt(layout.pieces, offset).toString(16).toUpperCase().padStart(4, "0")}`;
  return new AppError("dump.incomplete", {
    missing: missing.map(([from, to]) => ({ from: address(from), to: address(to) })),
    message: `The dump does not hold all ${layout.bytes} bytes from ${address(0)}: the first one missing is at ${address(missing[0]?.[0] ?? 0)}. Read the whole memory.`,
  });
}
