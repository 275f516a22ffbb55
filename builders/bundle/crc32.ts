import * as zlib from "node:zlib";
import { CRC_CATALOGUE, type CrcParameters, getCrc, makeCrc, reflectBits } from "@/builders/codec/crc";

const NAME = "CRC-32/ISO-HDLC";

/** Compiled, and so three times as fast; older releases of Node.js 20 lack it. */
const compiled = "crc32" in zlib ? (zlib.crc32 as (data: Uint8Array, before?: number) => number) : undefined;

/** CRC-32/ISO-HDLC, the one of zips. @param before what the same bytes' earlier pieces gave */
export function crc32(piece: Uint8Array, before = 0): number {
  return (compiled ?? plainCrc32)(piece, before);
}

/** As {@link crc32}, on any Node.js. */
export function plainCrc32(piece: Uint8Array, before = 0): number {
  if (before === 0) return getCrc(NAME)(piece, 0, piece.length);
  const parameters = CRC_CATALOGUE[NAME] as CrcParameters;
  // Goes on from the register that the pieces before left behind.
  const init = reflectBits((before ^ parameters.xorout) >>> 0, parameters.width);
  return makeCrc({ ...parameters, init })(piece, 0, piece.length);
}
