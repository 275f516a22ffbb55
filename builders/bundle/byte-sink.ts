import { createHash } from "node:crypto";
import { crc32 } from "@/builders/bundle/crc32";

const PIECE_BYTES = 1024 * 1024;

/**
 * Bytes that grow at their end: written into pieces of 1 MiB, so that nothing is copied when they grow, and hashed piece by
 * piece, so that neither adding nor hashing holds the event loop. Where only their sums are asked for, one piece does for all.
 */
export class ByteSink {
  readonly #keep: boolean;
  readonly #full: Buffer[] = [];
  readonly #hash = createHash("sha256");
  #piece = Buffer.allocUnsafe(PIECE_BYTES);
  #filled = 0;
  #length = 0;
  #crc = 0;

  /** @param keep false where only length and sums are wanted. */
  constructor({ keep }: { keep: boolean }) {
    this.#keep = keep;
  }

  get length(): number {
    return this.#length + this.#filled;
  }

  /** Adds a text as UTF-8. */
  addText(text: string): void {
    // A UTF-16 unit takes at most three bytes.
    const target = this.reserve(3 * text.length);
    this.#filled += target.write(text, this.#filled);
  }

  /**
   * Makes room for more bytes. What its caller writes into the piece that it returns, from {@link place} on, counts once it says
   * by {@link advance} how many they were.
   */
  reserve(room: number): Buffer {
    if (this.#filled + room > this.#piece.length) this.#turn(room);
    return this.#piece;
  }

  /** Where the next byte goes in the piece that was reserved. */
  get place(): number {
    return this.#filled;
  }

  /** @param bytes at most as many as were reserved. */
  advance(bytes: number): void {
    this.#filled += bytes;
  }

  #turn(room: number): void {
    const done = this.#piece.subarray(0, this.#filled);
    this.#hash.update(done);
    this.#crc = crc32(done, this.#crc);
    this.#length += done.length;
    this.#filled = 0;
    if (this.#keep) this.#full.push(done);
    if (this.#keep || room > this.#piece.length) this.#piece = Buffer.allocUnsafe(Math.max(PIECE_BYTES, room));
  }

  /** The pieces that are full and were not taken yet; {@link finish} no longer has them. */
  take(): Buffer[] {
    return this.#full.splice(0);
  }

  /** What was added. Nothing may be added afterwards. */
  finish(): SunkBytes {
    this.#turn(0);
    return { pieces: this.#full, length: this.#length, sha256: this.#hash.digest("hex"), crc32: this.#crc };
  }
}

/** Bytes that came in pieces, as {@link ByteSink} tells them. */
export interface SunkBytes {
  /** Without those that were taken; empty where they are not kept. */
  pieces: Buffer[];
  length: number;
  /** Lower-case hex. */
  sha256: string;
  /** CRC-32/ISO-HDLC. */
  crc32: number;
}
