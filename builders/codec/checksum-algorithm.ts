import { makeSum, makeXor } from "@/builders/codec/byte-sums";
import { type Crc, type CrcParameters, findCrcParameters, getCrc, makeCrc } from "@/builders/codec/crc";
import { AppError } from "@/lib/errors";
import type { ByteRange, ChecksumAlgorithm, CrcDefinition, LayoutChecksum } from "@/schemas/documents/layout";

/** Sizes of a check, bits. */
export const CRC_WIDTHS: readonly number[] = [8, 16, 24, 32];
export const SUM_WIDTHS: readonly number[] = [8, 16, 32];

/** Bits of a check; undefined for an unknown name or size. */
export function findAlgorithmBits(algorithm: ChecksumAlgorithm): number | undefined {
  if (typeof algorithm === "string") return findCrcParameters(algorithm)?.width;
  if ("sum" in algorithm) return SUM_WIDTHS.includes(algorithm.sum) ? algorithm.sum : undefined;
  if ("xor" in algorithm) return algorithm.xor === 8 ? 8 : undefined;
  return CRC_WIDTHS.includes(algorithm.width) ? algorithm.width : undefined;
}

/** Bytes of a checksum; undefined for an unknown algorithm. */
export function findChecksumWidth(algorithm: ChecksumAlgorithm): number | undefined {
  const bits = findAlgorithmBits(algorithm);
  return bits && bits / 8;
}

/** The check itself. @throws AppError `checksum.unknown_algorithm` {algorithm} */
export function makeChecksum(algorithm: ChecksumAlgorithm): Crc {
  if (typeof algorithm === "string") return getCrc(algorithm);
  if (findAlgorithmBits(algorithm) === undefined) throw new AppError("checksum.unknown_algorithm", { algorithm });
  if ("sum" in algorithm) return makeSum(algorithm.sum, algorithm.complement ?? "none");
  if ("xor" in algorithm) return makeXor(algorithm.complement ?? "none");
  return makeCrc(crcParametersOf(algorithm));
}

/** Parameters of a definition, whose numbers are written as hex digits. */
export function crcParametersOf({ width, poly, init, refin, refout, xorout }: CrcDefinition): CrcParameters {
  const number = (hex: string) => Number.parseInt(hex, 16);
  return {
    width: width as CrcParameters["width"],
    poly: number(poly),
    init: number(init),
    refin,
    refout,
    xorout: number(xorout),
  };
}

/** The ranges that a checksum covers, in the order in which it runs through them. */
export function rangesOf(over: LayoutChecksum["over"]): ByteRange[] {
  return isRangeList(over) ? over : [over];
}

function isRangeList(over: LayoutChecksum["over"]): over is ByteRange[] {
  return Array.isArray(over[0]);
}
