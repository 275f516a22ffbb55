import type { ChecksumAlgorithm } from "@/schemas/documents/layout";

/** Hex digits in the one way that this program writes them: capitals, no leading zeros beyond `digits`. */
export function hexText(hex: string, digits = 1): string {
  return Number.parseInt(hex, 16).toString(16).toUpperCase().padStart(digits, "0");
}

/** The algorithm in words, for people and to tell two apart: equal definitions give equal texts, however they are written. */
export function algorithmText(algorithm: ChecksumAlgorithm): string {
  if (typeof algorithm === "string") return algorithm;
  if ("poly" in algorithm) {
    const { width, refin, refout } = algorithm;
    const [poly, init, xorout] = [algorithm.poly, algorithm.init, algorithm.xorout].map((hex) =>
      hexText(hex, width / 4),
    );
    return `CRC of ${width} bits, poly ${poly}, init ${init}, refin ${refin}, refout ${refout}, xorout ${xorout}`;
  }
  const { complement = "none" } = algorithm;
  const tail = complement === "none" ? "" : `, ${complement === "ones" ? "ones'" : "two's"} complement`;
  return "sum" in algorithm ? `sum of bytes, ${algorithm.sum} bits${tail}` : `exclusive or of bytes${tail}`;
}
