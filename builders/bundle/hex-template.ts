import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { writeImageHex } from "@/builders/codec/files/hex-image";
import { findOffset, type MemoryPiece } from "@/builders/codec/segments";

/** Characters of a data record before its data: colon, count, address, type. */
const HEAD = 9;

const digits = (place: 0 | 1) =>
  Uint8Array.from({ length: 256 }, (_, byte) => byte.toString(16).toUpperCase().padStart(2, "0").charCodeAt(place));
const HIGH = digits(0);
const LOW = digits(1);

interface DataRecord {
  /** Place of its first digit of data in the text. */
  text: number;
  /** Bytes of the image that it holds, from the first up to, not including, the second. */
  from: number;
  end: number;
  /** Sum of count and address: what the check counts besides the data. */
  sum: number;
}

/**
 * The Intel HEX text of every image of one layout. Addresses and record lengths are the same for each, so that only digits of
 * data and checks are written anew: the very text of {@link writeImageHex}, at a multiple of its speed.
 */
export class HexTemplate {
  readonly #text: Uint8Array;
  readonly #records: DataRecord[] = [];

  constructor({ bytes, pieces, written }: CompiledLayout) {
    const text = writeImageHex({ written }, new Uint8Array(bytes));
    this.#text = Buffer.from(text, "latin1");
    let upper = 0;
    let at = 0;
    for (const line of text.split("\n")) {
      const [count, low, type] = [line.slice(1, 3), line.slice(3, 7), line.slice(7, HEAD)];
      if (type === "04") upper = Number.parseInt(line.slice(HEAD, HEAD + 4), 16);
      if (type === "00") this.#addRecord(at, Number.parseInt(count, 16), Number.parseInt(low, 16), upper, pieces);
      at += line.length + 1;
    }
  }

  #addRecord(at: number, count: number, low: number, upper: number, pieces: readonly MemoryPiece[]): void {
    const from = findOffset(pieces, upper * 0x10000 + low) ?? 0;
    this.#records.push({ text: at + HEAD, from, end: from + count, sum: count + (low >> 8) + (low & 0xff) });
  }

  /** Characters of a text, which are its bytes. */
  get length(): number {
    return this.#text.length;
  }

  /** Writes the text of an image into `target` from `at`, where {@link length} bytes have to be free. */
  write(image: Uint8Array, target: Uint8Array, at: number): void {
    target.set(this.#text, at);
    for (const record of this.#records) {
      let place = at + record.text;
      let sum = record.sum;
      for (let i = record.from; i < record.end; i++) {
        const byte = image[i] as number;
        sum += byte;
        target[place++] = HIGH[byte] as number;
        target[place++] = LOW[byte] as number;
      }
      const check = -sum & 0xff;
      target[place++] = HIGH[check] as number;
      target[place] = LOW[check] as number;
    }
  }

  /** The text of an image, in memory of its own. */
  bytesOf(image: Uint8Array): Buffer {
    const text = Buffer.allocUnsafe(this.length);
    this.write(image, text, 0);
    return text;
  }
}
