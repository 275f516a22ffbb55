const LOWER = Array.from({ length: 256 }, (_, byte) => byte.toString(16).padStart(2, "0"));
/** Two upper-case hex digits of every byte value. */
export const UPPER_HEX = LOWER.map((pair) => pair.toUpperCase());

/** Lower-case hex of the bytes from `from` up to, not including, `end`. */
export function toHex(bytes: Uint8Array, from = 0, end = bytes.length): string {
  let text = "";
  for (let i = from; i < end; i++) text += LOWER[bytes[i] as number];
  return text;
}
