import { isCount, isObject, isRange, type Loose } from "@/builders/codec/json-shape";

/** Hex digits of up to 32 bits. */
export const isHexNumber = (value: unknown): value is string =>
  typeof value === "string" && /^[0-9A-Fa-f]{1,8}$/.test(value);

const COMPLEMENTS: readonly unknown[] = [undefined, "none", "ones", "twos"];

/** A catalogue name, a cyclic redundancy check by its parameters, a sum, or an exclusive or. */
export function wrongInAlgorithm(algorithm: unknown): string | null {
  if (typeof algorithm === "string") return null;
  if (!isObject(algorithm)) return "needs an algorithm: a catalogue name, or parameters";
  if ("sum" in algorithm || "xor" in algorithm) {
    const bits = algorithm.sum ?? algorithm.xor;
    const known = isCount(bits, 1, 64) && COMPLEMENTS.includes(algorithm.complement);
    return known ? null : "needs bits for its “sum” or “xor”, and a complement of none, ones or twos";
  }
  const { width, poly, init, refin, refout, xorout } = algorithm;
  const complete =
    isCount(width, 1, 64) &&
    [poly, init, xorout].every(isHexNumber) &&
    [refin, refout].every((flag) => typeof flag === "boolean");
  return complete ? null : "needs width, poly, init, refin, refout and xorout, numbers as hex digits";
}

export function wrongInCovered(over: unknown): string | null {
  if (isRange(over)) return null;
  if (Array.isArray(over) && over.length > 0 && over.every(isRange)) return null;
  return "“over” must be a range [from, to] or a list of ranges";
}

export function wrongInForbidden({ forbid, instead }: Loose): string | null {
  if (forbid !== undefined && !(Array.isArray(forbid) && forbid.every(isHexNumber))) {
    return "“forbid” must be a list of values as hex digits";
  }
  return instead === undefined || isHexNumber(instead) ? null : "“instead” must be a value as hex digits";
}
