import type { CompiledField, CompiledLayout } from "@/builders/codec/compile-layout";
import { checkChecksums, type DecodedField } from "@/builders/codec/image";
import type { ImageSources } from "@/builders/codec/sources";

/** A value of an image that is not what was put in. */
export interface ValueFault {
  field: string;
  expected: number | string | null;
  actual: number | string | null;
}

/** Decimal scales are not exact in binary: decoding may add this much of a step to the half of rounding. */
const ROUNDING = 1e-9;

/**
 * How far a decoded number may lie from the one that was stored: half a step of an integer, of packed decimal and of fixed
 * point, half a unit in the last place of a binary32, nothing of a binary64.
 */
export function storageTolerance(field: CompiledField, value: number): number {
  if (field.number?.kind === "integer") {
    return Math.abs(field.scale) * (0.5 + ROUNDING) + Math.abs(value) * 2 ** -50;
  }
  return field.type === "f32" ? Math.max(Math.abs(value) * 2 ** -24, 2 ** -150) : 0;
}

/**
 * Compares what an image holds, decoded, with what it was made from, field by field and checksum by checksum.
 * Encoder and decoder meet here only in the layout: a value that went to the wrong place does not read back.
 * @param decoded of these bytes and this layout.
 */
export function listRoundTripFaults(
  layout: CompiledLayout,
  sources: ImageSources,
  bytes: Uint8Array,
  decoded: readonly DecodedField[],
): ValueFault[] {
  const faults: ValueFault[] = [];
  layout.fields.forEach((field, i) => {
    const expected = field.read(sources) ?? null;
    const actual = decoded[i]?.value ?? null;
    if (!isSame(field, expected, actual)) faults.push({ field: field.name, expected, actual });
  });
  for (const sum of checkChecksums(layout, bytes)) {
    if (!sum.ok) faults.push({ field: sum.name, expected: sum.expected, actual: sum.stored });
  }
  return faults;
}

function isSame(field: CompiledField, expected: number | string | null, actual: number | string | null): boolean {
  if (field.names && typeof expected === "number") return field.names.name.get(expected) === actual;
  if (field.number?.kind === "wide" && typeof expected === "number") return Math.abs(Number(actual) - expected) <= 0.5;
  if (typeof expected === "number" && typeof actual === "number")
    return Math.abs(actual - expected) <= storageTolerance(field, expected);
  if (field.type === "bytes" && typeof expected === "string") return expected.toLowerCase() === actual;
  return expected === actual;
}
