import { findNumberType, integerOf } from "@/builders/codec/field-types";
import { lintConstant } from "@/builders/codec/lint/lint-constant";
import type { Add } from "@/builders/codec/lint/lint-field";
import { lintScaled } from "@/builders/codec/lint/lint-scaled";
import { isTextSource, SOURCE_NAMES } from "@/builders/codec/sources";
import type { BitField, LayoutField } from "@/schemas/documents/layout";

/** The parts of an integer's bits: each on its own, and that they lie inside it and apart. */
export function lintBits(field: LayoutField, parts: readonly BitField[], add: Add): void {
  const whole = findNumberType(field.type);
  if (whole?.kind !== "integer" || whole.min < 0) {
    add("type", "bits_type", `is ${field.type}; only u8, u16, u24 and u32 are made of bits`);
    return;
  }
  const bits = 8 * whole.width;
  const taken = new Array<string | undefined>(bits);
  const names = new Set<string>();
  parts.forEach((part, i) => {
    const path = `value/bits/${i}`;
    lintPart(part, (tail, reason, message) => add(`${path}/${tail}`, reason, `has bits “${part.name}”: ${message}`));
    if (names.has(part.name)) add(`${path}/name`, "duplicate_name", `has two parts “${part.name}”`);
    names.add(part.name);
    if (part.from + part.width > bits) {
      add(
        `${path}/width`,
        "bits_outside",
        `has ${bits} bits, “${part.name}” ends at bit ${part.from + part.width - 1}`,
      );
      return;
    }
    const other = taken.slice(part.from, part.from + part.width).find((name) => name !== undefined);
    if (other !== undefined) add(`${path}/from`, "bits_overlap", `has “${other}” and “${part.name}” in the same bits`);
    taken.fill(part.name, part.from, part.from + part.width);
  });
}

function lintPart(part: BitField, add: Add): void {
  const type = integerOf(part.width, part.signed ?? false);
  const size = `${part.width} ${part.width === 1 ? "bit" : "bits"}`;
  lintScaled(part, type, size, (tail, reason, message) => add(tail, reason, message));
  const { value } = part;
  if ("const" in value) {
    lintConstant({ ...part, type: "u32" }, type, value.const, (_, reason, message) =>
      add("value/const", reason, message),
    );
  } else if (!SOURCE_NAMES.includes(value.from)) {
    add("value/from", "unknown_source", `“${value.from}” is no source`);
  } else if (isTextSource(value.from)) {
    add("value/from", "source_type", `“${value.from}” is a text`);
  }
  if (!part.enum) return;
  for (const key of ["scale", "bias", "min", "max"] as const) {
    if (part[key] !== undefined) add(key, "member_not_allowed", `it has names for its numbers and takes no “${key}”`);
  }
}
