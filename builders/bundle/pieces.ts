/**
 * Cuts bytes that come in pieces of any length anew, into pieces of one length; only the last may be shorter.
 */
export class PieceCutter {
  readonly #size: number;
  #piece: Uint8Array;
  #filled = 0;

  /** @param size bytes of a piece, at least 1. */
  constructor(size: number) {
    this.#size = size;
    this.#piece = new Uint8Array(size);
  }

  /** Takes more bytes. @returns the pieces that they filled. */
  add(part: Uint8Array): Uint8Array[] {
    const full: Uint8Array[] = [];
    for (let at = 0; at < part.length; ) {
      const taken = part.subarray(at, at + this.#size - this.#filled);
      this.#piece.set(taken, this.#filled);
      this.#filled += taken.length;
      at += taken.length;
      if (this.#filled < this.#size) continue;
      full.push(this.#piece);
      this.#piece = new Uint8Array(this.#size);
      this.#filled = 0;
    }
    return full;
  }

  /** What is left; undefined where nothing is. */
  rest(): Uint8Array | undefined {
    return this.#filled > 0 ? this.#piece.subarray(0, this.#filled) : undefined;
  }
}
