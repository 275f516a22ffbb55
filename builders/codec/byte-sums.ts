import type { Crc } from "@/builders/codec/crc";
import type { Complement } from "@/schemas/documents/layout";

/** All bytes added up, kept to `width` bits (8, 16 or 32), then the complement, as an unsigned number. */
export function makeSum(width: number, complement: Complement): Crc {
  const finish = finishOf(width, complement);
  return (bytes, from, end) => {
    let sum = 0;
    // 65,536 bytes at most: far below 2^32.
    for (let i = from; i < end; i++) sum += bytes[i] as number;
    return finish(sum);
  };
}

/** All bytes combined by exclusive or, then the complement, as an unsigned number of 8 bits. */
export function makeXor(complement: Complement): Crc {
  const finish = finishOf(8, complement);
  return (bytes, from, end) => {
    let sum = 0;
    for (let i = from; i < end; i++) sum ^= bytes[i] as number;
    return finish(sum);
  };
}

/** Ones' complement: every bit turned. Two's complement: what adds up to 0 with the sum. */
function finishOf(width: number, complement: Complement): (sum: number) => number {
  const top = 2 ** width;
  if (complement === "ones") return (sum) => top - 1 - (sum % top);
  if (complement === "twos") return (sum) => (top - (sum % top)) % top;
  return (sum) => sum % top;
}
