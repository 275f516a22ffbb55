import { AppError } from "@/lib/errors";

/** Bytes without a gap from an address on. */
export interface HexSegment {
  address: number;
  bytes: Uint8Array;
}

/** What a file of records says, Intel HEX or S-records. */
export interface HexFile {
  /** In rising order, touching ones joined. */
  segments: HexSegment[];
  /** Stretches between segments that the file says nothing about. */
  gaps: { address: number; length: number }[];
  /** Where to start, from a record that tells it; null without one. */
  start: number | null;
}

/** The data of one record, with its line. */
export interface FilePiece extends HexSegment {
  line: number;
}

/**
 * What the data records of a file say together.
 * @param format word before the reason of an error's code.
 * @throws AppError `<format>.overlap` {line, first}
 */
export function joinPieces(pieces: readonly FilePiece[], format: "hex" | "srec"): Omit<HexFile, "start"> {
  const rising = pieces
    .filter((piece) => piece.bytes.length > 0)
    .sort((a, b) => a.address - b.address || a.line - b.line);
  const groups: FilePiece[][] = [];
  let next = -1;
  let last: FilePiece | undefined;
  for (const piece of rising) {
    if (last && piece.address < next) {
      const [first, second] = last.line < piece.line ? [last, piece] : [piece, last];
      const reason = `writes bytes that line ${first.line} wrote`;
      throw lineRefusal(`${format}.overlap`, second.line, reason, { first: first.line });
    }
    if (piece.address === next) groups.at(-1)?.push(piece);
    else groups.push([piece]);
    next = piece.address + piece.bytes.length;
    last = piece;
  }
  const segments = groups.map(joinGroup);
  return { segments, gaps: gapsBetween(segments) };
}

function joinGroup(group: readonly FilePiece[]): HexSegment {
  const bytes = new Uint8Array(group.reduce((total, piece) => total + piece.bytes.length, 0));
  let at = 0;
  for (const piece of group) {
    bytes.set(piece.bytes, at);
    at += piece.bytes.length;
  }
  return { address: group[0]?.address ?? 0, bytes };
}

function gapsBetween(segments: readonly HexSegment[]): HexFile["gaps"] {
  return segments.slice(1).map((segment, i) => {
    const before = segments[i] as HexSegment;
    const address = before.address + before.bytes.length;
    return { address, length: segment.address - address };
  });
}

/** The lines of a file without their ends, LF or CRLF; an empty one after the last line end is none. */
export function linesOf(text: string): string[] {
  const lines = text.split("\n").map((line) => (line.endsWith("\r") ? line.slice(0, -1) : line));
  if (lines.at(-1) === "") lines.pop();
  return lines;
}

/** Bytes of an even count of hex digits, either case. */
export function bytesOfDigits(digits: string): Uint8Array {
  const bytes = new Uint8Array(digits.length / 2);
  for (let i = 0; i < bytes.length; i++) {
    bytes[i] = nibble(digits.charCodeAt(2 * i)) * 16 + nibble(digits.charCodeAt(2 * i + 1));
  }
  return bytes;
}

/** Value of a hex digit's character code: letters of both cases share their low bits. */
function nibble(code: number): number {
  return code <= 0x39 ? code - 0x30 : (code & 0xf) + 9;
}

/** Bytes as one unsigned number, high byte first. */
export function numberOf(data: Uint8Array): number {
  return data.reduce((total, byte) => total * 256 + byte, 0);
}

/** A refusal of one line. */
export function lineRefusal(
  code: string,
  line: number,
  reason: string,
  details: { [key: string]: number } = {},
): AppError {
  return new AppError(code, { line, ...details, message: `Line ${line} ${reason}` });
}
