import {
  bytesOfDigits,
  type FilePiece,
  type HexFile,
  joinPieces,
  linesOf,
  numberOf,
  lineRefusal as refusal,
} from "@/builders/codec/files/file-segments";

/** Bytes of the address in each type of record; S4 is reserved. */
const ADDRESS_BYTES: Readonly<Record<number, number>> = { 0: 2, 1: 2, 2: 3, 3: 4, 5: 2, 6: 3, 7: 4, 8: 3, 9: 2 };

interface SRecord {
  line: number;
  type: number;
  address: number;
  data: Uint8Array;
}

/** What was read so far. */
interface Progress {
  pieces: FilePiece[];
  /** Line of the end record; 0 before it. */
  end: number;
  start: number;
  /** The last line counts all data records. */
  counted: boolean;
}

/**
 * Reads S-records strictly. Takes LF and CRLF, both cases, a header as the first line, data of 16-, 24- and 32-bit
 * addresses side by side and in any order, which may run on over the highest address of their type, counts of the data
 * records before them, gaps (reported). A file ends with an end record or, as srec_cat writes it where no start address is
 * known, with a count: both tell one that was cut short.
 * @returns `start` from the end record; null where that is 0, which says nothing.
 * @throws AppError with {line}: `srec.not_a_record`, `srec.not_hex`, `srec.wrong_length`, `srec.bad_checksum`,
 * `srec.unknown_type`, `srec.header_inside`, `srec.wrong_count` {declared, actual}, `srec.address_out_of_range`,
 * `srec.overlap` {first}, `srec.after_end`, `srec.no_end`.
 */
export function readSRecords(text: string): HexFile {
  const progress: Progress = { pieces: [], end: 0, start: 0, counted: false };
  const lines = linesOf(text);
  lines.forEach((content, i) => {
    if (progress.end > 0 && content === "") return;
    if (progress.end > 0) throw refusal("srec.after_end", i + 1, "stands after the end record", { end: progress.end });
    takeRecord(parseRecord(content, i + 1), progress);
  });
  if (progress.end === 0 && !progress.counted) {
    throw refusal("srec.no_end", lines.length, "is the last one, and there is neither an end record nor a count");
  }
  return { ...joinPieces(progress.pieces, "srec"), start: progress.start === 0 ? null : progress.start };
}

function takeRecord({ line, type, address, data }: SRecord, progress: Progress): void {
  const { pieces } = progress;
  progress.counted = type === 5 || type === 6;
  if (type === 0) {
    if (line > 1) throw refusal("srec.header_inside", line, "is a header, which stands first or nowhere");
    return;
  }
  if (type <= 3) {
    if (address + data.length > 2 ** 32)
      throw refusal("srec.address_out_of_range", line, "ends above address FFFFFFFF");
    pieces.push({ line, address, bytes: data });
    return;
  }
  if (data.length > 0) throw refusal("srec.wrong_length", line, `of type S${type} holds no data`);
  if (type <= 6) {
    if (address === pieces.length) return;
    const counts = { declared: address, actual: pieces.length };
    throw refusal("srec.wrong_count", line, `counts ${address} data records, there are ${pieces.length}`, counts);
  }
  progress.end = line;
  progress.start = address;
}

function parseRecord(content: string, line: number): SRecord {
  if (!/^[Ss]/.test(content)) throw refusal("srec.not_a_record", line, "does not start with an S");
  const digits = content.slice(2);
  const wrong = content.slice(1).search(/[^0-9A-Fa-f]/);
  if (wrong >= 0) throw refusal("srec.not_hex", line, `has no hex digit at column ${wrong + 2}`, { column: wrong + 2 });
  const type = Number.parseInt(content.slice(1, 2), 16);
  const addressBytes = ADDRESS_BYTES[type];
  if (addressBytes === undefined)
    throw refusal("srec.unknown_type", line, `has the unknown record type S${content[1] ?? ""}`);
  const declared = Number.parseInt(digits.slice(0, 2), 16);
  if (digits.length !== 2 * (declared + 1) || declared < addressBytes + 1) {
    throw refusal("srec.wrong_length", line, "is not as long as it says", { declared, actual: digits.length / 2 - 1 });
  }
  const bytes = bytesOfDigits(digits);
  // All bytes behind the type, the checksum among them, sum to 255 modulo 256.
  const sum = bytes.reduce((total, byte) => (total + byte) & 0xff, 0);
  if (sum !== 0xff) throw refusal("srec.bad_checksum", line, "has a wrong checksum");
  return {
    line,
    type,
    address: numberOf(bytes.subarray(1, 1 + addressBytes)),
    data: bytes.slice(1 + addressBytes, -1),
  };
}
