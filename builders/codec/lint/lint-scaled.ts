import type { NumberType } from "@/builders/codec/field-types";
import type { Add } from "@/builders/codec/lint/lint-field";
import { roundHalfEven } from "@/builders/codec/round-half-even";
import { wideEnds } from "@/builders/codec/wide-integer";
import type { Enumeration } from "@/schemas/documents/layout";

/** What turns a number into what is stored, of a field or of a part of its bits. */
export interface Scaled {
  scale?: number;
  bias?: number;
  min?: number;
  max?: number;
  enum?: Enumeration;
}

/** Scale, limits and names of a number against what its type can store. @param size the type in words. */
export function lintScaled(part: Scaled, type: NumberType, size: string, add: Add): void {
  if (type.kind === "integer" && part.scale === 0) add("scale", "scale_zero", "has a scale of 0");
  if (part.min !== undefined && part.max !== undefined && part.min > part.max) {
    add("min", "limits_inverted", "has a lower limit above its upper limit");
  }
  for (const end of ["min", "max"] as const) {
    const limit = part[end];
    if (limit !== undefined && !fits(part, type, limit)) {
      add(end, "type_too_narrow", `is too narrow: ${limit} does not fit into ${size} at this scale`);
    }
  }
  if (part.enum) lintNames(part.enum, type, size, add);
}

function lintNames(names: Enumeration, type: NumberType, size: string, add: Add): void {
  const seen = new Map<number, string>();
  for (const [name, stored] of Object.entries(names)) {
    const tail = `enum/${name.replaceAll("~", "~0").replaceAll("/", "~1")}`;
    if (stored < type.min || stored > type.max) {
      add(tail, "enum_out_of_range", `has the name “${name}” for ${stored}, which does not fit into ${size}`);
    }
    const other = seen.get(stored);
    if (other === undefined) seen.set(stored, name);
    else add(tail, "enum_ambiguous", `has two names for ${stored}: “${other}” and “${name}”`);
  }
}

/** True where the value can be stored, by the encoder's own arithmetic. */
export function fits(part: Pick<Scaled, "scale" | "bias">, type: NumberType, value: number): boolean {
  if (type.kind === "float") return type.width === 8 || Number.isFinite(Math.fround(value));
  if (type.kind === "wide") {
    const { min, max } = wideEnds(type.min < 0 ? "i64" : "u64");
    const stored = BigInt(roundHalfEven(value));
    return stored >= min && stored <= max;
  }
  // A scale of 0 has its own finding.
  if (part.scale === 0) return true;
  const stored = roundHalfEven((value - (part.bias ?? 0)) / (part.scale ?? 1));
  return stored >= type.min && stored <= type.max;
}
