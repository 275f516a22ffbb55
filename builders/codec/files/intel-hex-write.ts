import { UPPER_HEX } from "@/builders/codec/files/hex-text";
import { listSegments, listWrittenPieces, type MemoryPiece } from "@/builders/codec/segments";
import { AppError } from "@/lib/errors";
import type { ByteRange } from "@/schemas/documents/layout";

const RECORD_BYTES = 16;
const END_RECORD = ":00000001FF\n";

/**
 * An image in one piece as Intel HEX; see {@link writeHexPieces}.
 * @param baseAddress address of byte 0.
 * @param kept inclusive offsets, in any order: the only bytes that are left out.
 * @throws AppError `hex.address_out_of_range` where the image ends above address FFFFFFFF.
 */
export function writeIntelHex(bytes: Uint8Array, baseAddress: number, kept: readonly ByteRange[]): string {
  return writeHexPieces(bytes, listWrittenPieces(listSegments({ bytes: bytes.length, baseAddress }), kept));
}

/**
 * Pieces of an image as Intel HEX (contract, section 5; record layout: Hexadecimal Object File Format Specification, Rev. A,
 * 1988). Records hold up to 16 bytes, start at addresses that are multiples of 16 (or at the first byte of a piece) and
 * never cross one; an extended linear address record stands before the first record of each 64 K above the first; upper
 * case, LF, one end record.
 * @param pieces by rising address.
 * @throws AppError `hex.address_out_of_range` where one ends above address FFFFFFFF.
 */
export function writeHexPieces(bytes: Uint8Array, pieces: readonly MemoryPiece[]): string {
  let text = "";
  let upper = 0;
  for (const piece of pieces) {
    const { end, address: start } = piece;
    assertAddresses(piece);
    let at = piece.at;
    while (at < end) {
      const address = start + at - piece.at;
      if (Math.floor(address / 0x10000) !== upper) {
        upper = Math.floor(address / 0x10000);
        text += upperAddressRecord(upper);
      }
      const next = Math.min(end, at + RECORD_BYTES - (address % RECORD_BYTES));
      text += dataRecord(bytes, at, next, address & 0xffff);
      at = next;
    }
  }
  return text + END_RECORD;
}

/** @throws AppError `hex.address_out_of_range` {baseAddress, bytes} */
export function assertAddresses({ at, end, address }: MemoryPiece): void {
  if (address >= 0 && address + end - at <= 2 ** 32) return;
  throw new AppError("hex.address_out_of_range", { baseAddress: address, bytes: end - at });
}

function dataRecord(bytes: Uint8Array, at: number, end: number, low: number): string {
  let sum = end - at + (low >> 8) + (low & 0xff);
  let text = `:${UPPER_HEX[end - at]}${UPPER_HEX[low >> 8]}${UPPER_HEX[low & 0xff]}00`;
  for (let i = at; i < end; i++) {
    const byte = bytes[i] as number;
    sum += byte;
    text += UPPER_HEX[byte];
  }
  return `${text}${UPPER_HEX[-sum & 0xff]}\n`;
}

/** Extended linear address record: the upper 16 bits of the addresses that follow. */
export function upperAddressRecord(upper: number): string {
  const [high, low] = [upper >> 8, upper & 0xff];
  return `:02000004${UPPER_HEX[high]}${UPPER_HEX[low]}${UPPER_HEX[-(6 + high + low) & 0xff]}\n`;
}
