/**
 * Cuts a stream of bytes anew, into pieces of one length; only the last may be shorter.
 * @param size bytes of a piece, at least 1.
 */
export function* cutPieces(stream: Iterable<Uint8Array>, size: number): Generator<Uint8Array> {
  let piece = new Uint8Array(size);
  let filled = 0;
  for (const part of stream) {
    for (let at = 0; at < part.length; ) {
      const taken = part.subarray(at, at + size - filled);
      piece.set(taken, filled);
      filled += taken.length;
      at += taken.length;
      if (filled < size) continue;
      yield piece;
      piece = new Uint8Array(size);
      filled = 0;
    }
  }
  if (filled > 0) yield piece.subarray(0, filled);
}
