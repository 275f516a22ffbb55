/** How a text file of readings may be written. */
export const ENCODINGS = ["utf-8", "utf-16le", "utf-16be", "windows-1252"] as const;
export type Encoding = (typeof ENCODINGS)[number];

const SNIFFED_BYTES = 4096;
/** Share of NUL bytes at even or odd places from which a file without a mark is taken for UTF-16. */
const NUL_SHARE = 0.2;

/** The encoding that a file most likely has: by its byte order mark, by NUL bytes, by being UTF-8 all through. */
export function sniffEncoding(bytes: Uint8Array): Encoding {
  const [first, second] = bytes;
  if (first === 0xff && second === 0xfe) return "utf-16le";
  if (first === 0xfe && second === 0xff) return "utf-16be";
  const head = bytes.subarray(0, SNIFFED_BYTES);
  const nuls = [0, 0];
  for (const [index, byte] of head.entries()) if (byte === 0) nuls[index % 2] = (nuls[index % 2] as number) + 1;
  const [even = 0, odd = 0] = nuls;
  if (Math.max(even, odd) > NUL_SHARE * head.length) return odd > even ? "utf-16le" : "utf-16be";
  return decodeText(bytes, "utf-8").text === undefined ? "windows-1252" : "utf-8";
}

/**
 * A file's text without its byte order mark.
 * @returns `text`, or in `badLine` the line with the first bytes that the encoding does not have
 */
export function decodeText(
  bytes: Uint8Array,
  encoding: Encoding,
): { text: string; badLine?: undefined } | { text?: undefined; badLine: number } {
  try {
    return { text: new TextDecoder(encoding, { fatal: true }).decode(bytes) };
  } catch {
    // The replacement character stands where the fault is, or stood in the file: then the first of either is named.
    const before = new TextDecoder(encoding).decode(bytes).split("\uFFFD", 1)[0] ?? "";
    return { badLine: before.split(/\r\n|\n|\r/).length };
  }
}
