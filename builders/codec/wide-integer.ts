import type { FieldType } from "@/schemas/documents/layout";

/** Ends of a 64-bit integer, inclusive. */
export function wideEnds(type: FieldType): { min: bigint; max: bigint } {
  return type === "i64" ? { min: -(2n ** 63n), max: 2n ** 63n - 1n } : { min: 0n, max: 2n ** 64n - 1n };
}

/** True for an integer as it is read back: decimal digits without leading zeros, − only before a number below 0. */
export function isWideText(value: unknown): value is string {
  return typeof value === "string" && /^(?:0|-?[1-9][0-9]{0,19})$/.test(value);
}
