import { UPPER_HEX } from "@/builders/codec/files/hex-text";
import { assertAddresses } from "@/builders/codec/files/intel-hex-write";
import { listSegments, listWrittenPieces, type MemoryPiece } from "@/builders/codec/segments";
import type { ByteRange } from "@/schemas/documents/layout";

const RECORD_BYTES = 16;
const HEADER = "S0030000FC\n";
const SHORT_COUNT_MAX = 0xffff;

/**
 * An image in one piece as S-records; see {@link writeSRecordPieces}.
 * @param kept inclusive offsets, in any order: the only bytes that are left out.
 * @throws AppError `hex.address_out_of_range`
 */
export function writeSRecords(bytes: Uint8Array, baseAddress: number, kept: readonly ByteRange[]): string {
  return writeSRecordPieces(bytes, listWrittenPieces(listSegments({ bytes: bytes.length, baseAddress }), kept));
}

/**
 * Pieces of an image as S-records (record layout from memory: the format of the M68000 family's programmer's reference
 * manual). An empty header; data records of up to 16 bytes that start and end as those of the Intel HEX, all of the
 * shortest address that reaches the last byte (S1: 16 bits, S2: 24, S3: 32); their count; an end record that fits them
 * with start address 0; upper case, LF.
 * @param pieces by rising address.
 * @throws AppError `hex.address_out_of_range` where one ends above address FFFFFFFF.
 */
export function writeSRecordPieces(bytes: Uint8Array, pieces: readonly MemoryPiece[]): string {
  pieces.forEach(assertAddresses);
  const highest = Math.max(0, ...pieces.map(({ at, end, address }) => address + end - at - 1));
  const addressBytes = highest > 0xff_ffff ? 4 : highest > 0xffff ? 3 : 2;
  let text = HEADER;
  let count = 0;
  for (const piece of pieces) {
    let { at } = piece;
    while (at < piece.end) {
      const address = piece.address + at - piece.at;
      const next = Math.min(piece.end, at + RECORD_BYTES - (address % RECORD_BYTES));
      text += record(addressBytes - 1, address, addressBytes, bytes.subarray(at, next));
      count++;
      at = next;
    }
  }
  const counted = count > SHORT_COUNT_MAX ? record(6, count, 3) : record(5, count, 2);
  return text + counted + record(11 - addressBytes, 0, addressBytes);
}

const NO_DATA = new Uint8Array();

/** `S`, type, count of what follows, address, data, and the ones' complement of the sum of all bytes behind the type. */
function record(type: number, address: number, addressBytes: number, data: Uint8Array = NO_DATA): string {
  const length = addressBytes + data.length + 1;
  let sum = length;
  let text = `S${type}${UPPER_HEX[length]}`;
  for (let i = addressBytes - 1; i >= 0; i--) {
    const byte = Math.floor(address / 2 ** (8 * i)) % 256;
    sum += byte;
    text += UPPER_HEX[byte];
  }
  for (const byte of data) {
    sum += byte;
    text += UPPER_HEX[byte];
  }
  return `${text}${UPPER_HEX[~sum & 0xff]}\n`;
}
