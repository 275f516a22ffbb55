import { createHash } from "node:crypto";

const PIECE_BYTES = 1024 * 1024;

/**
 * Bytes that grow at their end: written into pieces of 1 MiB, so that nothing is copied when they grow, and hashed piece by
 * piece, so that neither adding nor hashing holds the event loop.
 */
export class ByteSink {
  readonly #full: Buffer[] = [];
  readonly #hash = createHash("sha256");
  #piece = Buffer.allocUnsafe(PIECE_BYTES);
  #filled = 0;
  #length = 0;

  get length(): number {
    return this.#length + this.#filled;
  }

  /** Adds a text as UTF-8. */
  addText(text: string): void {
    // A UTF-16 unit takes at most three bytes.
    this.add(3 * text.length, (target, at) => target.write(text, at));
  }

  /** Adds what `write` puts into the target from `at`: at most `room` bytes; it returns how many. */
  add(room: number, write: (target: Buffer, at: number) => number): void {
    if (this.#filled + room > this.#piece.length) this.#turn(room);
    this.#filled += write(this.#piece, this.#filled);
  }

  #turn(room: number): void {
    const done = this.#piece.subarray(0, this.#filled);
    this.#hash.update(done);
    this.#full.push(done);
    this.#length += done.length;
    this.#piece = Buffer.allocUnsafe(Math.max(PIECE_BYTES, room));
    this.#filled = 0;
  }

  /** All that was added, in pieces, with its SHA-256 in lower-case hex. Nothing may be added afterwards. */
  finish(): { pieces: Buffer[]; length: number; sha256: string } {
    this.#turn(0);
    return { pieces: this.#full, length: this.#length, sha256: this.#hash.digest("hex") };
  }
}
