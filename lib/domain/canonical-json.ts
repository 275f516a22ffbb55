import canonicalize from "canonicalize";
import { AppError } from "@/lib/errors";

/**
 * The RFC 8785 form of a JSON value: members sorted by UTF-16 code units, numbers as ECMAScript writes them, no spaces.
 * Whatever is hashed or signed is written with it. Members that are undefined are left out.
 * @param value JSON: null, booleans, finite numbers, texts, arrays and plain objects of them.
 * @throws AppError `json.not_canonical` for what has no such form: NaN, infinities, lone surrogates, cycles, BigInt,
 * undefined by itself.
 */
export function canonicalJson(value: unknown): string {
  const text = attempt(value);
  if (text === undefined) throw new AppError("json.not_canonical", { message: "There is no JSON for this value" });
  return text;
}

function attempt(value: unknown): string | undefined {
  try {
    return canonicalize(value);
  } catch (cause) {
    throw new AppError("json.not_canonical", { message: "The value has no canonical JSON" }, { cause });
  }
}
