import {
  bytesOfDigits,
  type FilePiece,
  type HexFile,
  joinPieces,
  linesOf,
  numberOf,
  lineRefusal as refusal,
} from "@/builders/codec/files/file-segments";

export type { HexFile, HexSegment } from "@/builders/codec/files/file-segments";

interface Record {
  line: number;
  offset: number;
  type: number;
  data: Uint8Array;
}

/**
 * Reads Intel HEX strictly (Hexadecimal Object File Format Specification, Rev. A, 1988). Takes LF and CRLF, both cases,
 * records in any order, gaps (reported) and empty data records.
 * @throws AppError with {line}: `hex.not_a_record`, `hex.not_hex`, `hex.wrong_length`, `hex.bad_checksum`,
 * `hex.unknown_type`, `hex.nonzero_offset`, `hex.segment_wrap` (a record that runs over the end of its 64 K segment, on
 * which readers disagree), `hex.address_out_of_range`, `hex.overlap` {first}, `hex.after_end`, `hex.no_end`.
 */
export function readIntelHex(text: string): HexFile {
  const pieces: FilePiece[] = [];
  let base = 0;
  let segmented = false;
  let start: number | null = null;
  let endLine = 0;
  const lines = linesOf(text);
  lines.forEach((content, i) => {
    const line = i + 1;
    if (endLine > 0) {
      if (content === "") return;
      throw refusal("hex.after_end", line, "stands after the end record", { end: endLine });
    }
    const record = parseRecord(content, line);
    switch (record.type) {
      case 0x00:
        pieces.push({ line, address: addressOf(record, base, segmented), bytes: record.data });
        break;
      case 0x01:
        assertRecord(record, 0);
        endLine = line;
        break;
      case 0x02:
      case 0x04:
        assertRecord(record, 2);
        segmented = record.type === 0x02;
        base = numberOf(record.data) * (segmented ? 16 : 0x10000);
        break;
      case 0x03:
      case 0x05:
        assertRecord(record, 4);
        start = numberOf(record.data);
        break;
      default:
        throw refusal("hex.unknown_type", line, `has the unknown record type ${hex2(record.type)}`, {
          type: record.type,
        });
    }
  });
  if (endLine === 0) throw refusal("hex.no_end", lines.length, "is the last one, and there is no end record");
  return { ...joinPieces(pieces, "hex"), start };
}

function parseRecord(content: string, line: number): Record {
  if (!content.startsWith(":")) throw refusal("hex.not_a_record", line, "does not start with a colon");
  const digits = content.slice(1);
  const wrong = digits.search(/[^0-9A-Fa-f]/);
  if (wrong >= 0) throw refusal("hex.not_hex", line, `has no hex digit at column ${wrong + 2}`, { column: wrong + 2 });
  const declared = Number.parseInt(digits.slice(0, 2), 16);
  if (digits.length < 10 || digits.length !== 2 * (declared + 5)) {
    const actual = (digits.length - 10) / 2;
    throw refusal("hex.wrong_length", line, "is not as long as it says", { declared, actual });
  }
  const bytes = bytesOfDigits(digits);
  // All bytes of a record, its checksum among them, sum to 0 modulo 256.
  const sum = bytes.reduce((total, byte) => (total + byte) & 0xff, 0);
  if (sum !== 0) throw refusal("hex.bad_checksum", line, "has a wrong checksum");
  const [, high = 0, low = 0, type = 0] = bytes;
  return { line, offset: high * 256 + low, type, data: bytes.slice(4, -1) };
}

function addressOf(record: Record, base: number, segmented: boolean): number {
  const end = record.offset + record.data.length;
  if (segmented && end > 0x10000) {
    throw refusal("hex.segment_wrap", record.line, "runs over the end of its 64 K segment");
  }
  if (base + end > 2 ** 32) throw refusal("hex.address_out_of_range", record.line, "ends above address FFFFFFFF");
  return base + record.offset;
}

function assertRecord(record: Record, length: number): void {
  if (record.data.length !== length) {
    const detail = { declared: record.data.length, expected: length };
    throw refusal("hex.wrong_length", record.line, `of type ${hex2(record.type)} needs ${length} data bytes`, detail);
  }
  if (record.offset !== 0) {
    throw refusal("hex.nonzero_offset", record.line, `of type ${hex2(record.type)} has an address that is not 0000`);
  }
}

function hex2(value: number): string {
  return value.toString(16).toUpperCase().padStart(2, "0");
}
