/** Exact bytes under their digest, read in pieces so that none has to be held in memory whole. */
export interface StoredBytes {
  length: number;
  /** Of all of them, lower-case hex. */
  sha256: string;
  mediaType: string;
  /** Name under which a browser saves them. */
  fileName: string;
  /** The bytes from the first to the last offset, both inclusive, in pieces of any size. */
  read: (range: { first: number; last: number }) => AsyncIterable<Uint8Array>;
}

/** Bytes that are at hand already. */
export function heldBytes(content: Uint8Array, facts: Omit<StoredBytes, "length" | "read">): StoredBytes {
  return {
    ...facts,
    length: content.length,
    read: async function* ({ first, last }) {
      yield content.subarray(first, last + 1);
    },
  };
}
