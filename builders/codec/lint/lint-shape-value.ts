import { isCount, isObject, type Loose } from "@/builders/codec/json-shape";

const WRONG = "“value” must be {from: a source}, {const: a number, text or list} or {bits: a list of parts}";

/** Where a field's value comes from: a source, a constant (a list for an array), or parts of its bits. */
export function wrongInValue(value: unknown): string | null {
  if (!isObject(value) || Object.keys(value).length !== 1) return WRONG;
  if ("bits" in value) return wrongInBits(value.bits);
  if (Array.isArray(value.const)) return value.const.length > 0 && value.const.every(isConstant) ? null : WRONG;
  return isPlainValue(value) ? null : WRONG;
}

function wrongInBits(bits: unknown): string | null {
  if (!Array.isArray(bits) || bits.length === 0) return WRONG;
  for (const part of bits) {
    const wrong = wrongInPart(part);
    if (wrong !== null) return wrong;
  }
  return null;
}

function wrongInPart(part: unknown): string | null {
  if (!isObject(part) || typeof part.name !== "string" || part.name === "") return "has bits without a name";
  const named = (wrong: string) => `has bits “${part.name}”: ${wrong}`;
  if (!isCount(part.from, 0, 31) || !isCount(part.width, 1, 32)) {
    return named("“from” and “width” must be whole numbers, the lowest bit and how many there are");
  }
  if (part.signed !== undefined && typeof part.signed !== "boolean") return named("“signed” must be true or false");
  const wrong = wrongInNumbers(part);
  if (wrong !== null) return named(wrong);
  return isObject(part.value) && isPlainValue(part.value) ? null : named("“value” must be {from} or {const}");
}

function isPlainValue(value: Loose): boolean {
  if (Object.keys(value).length !== 1) return false;
  return "from" in value ? typeof value.from === "string" : isConstant(value.const);
}

function isConstant(value: unknown): boolean {
  return typeof value === "string" || (typeof value === "number" && Number.isFinite(value));
}

function isNumberOrAbsent(value: unknown): boolean {
  return value === undefined || (typeof value === "number" && Number.isFinite(value));
}

/** The numbers that tell a value's meaning: of a field and of a part of its bits. */
export function wrongInNumbers(part: Loose): string | null {
  const wrong = ["scale", "bias", "min", "max"].find((key) => !isNumberOrAbsent(part[key]));
  if (wrong !== undefined) return `“${wrong}” must be a number`;
  if (part.enum === undefined) return null;
  const named =
    isObject(part.enum) &&
    Object.keys(part.enum).length > 0 &&
    Object.values(part.enum).every((stored) => Number.isSafeInteger(stored));
  return named ? null : "“enum” must name whole numbers, such as {“linear”: 1}";
}
