import { findFieldNumber } from "@/builders/codec/field-types";
import type { Add } from "@/builders/codec/lint/lint-field";
import type { FieldType, LayoutField } from "@/schemas/documents/layout";

/** Members that go with some types only. */
const SPECIAL = ["length", "bits", "fraction", "signed", "scale", "bias", "min", "max", "enum", "count"] as const;
type Special = (typeof SPECIAL)[number];

const LIMITS: readonly Special[] = ["min", "max", "count"];

/** Which of them a type takes; every type not named here is an integer of up to 32 bits. */
const TAKEN: Partial<Record<FieldType, readonly Special[]>> = {
  u64: LIMITS,
  i64: LIMITS,
  f32: LIMITS,
  f64: LIMITS,
  fixed: [...LIMITS, "bits", "fraction", "signed"],
  bcd: [...LIMITS, "length", "scale", "bias"],
  ascii: ["length"],
  bytes: [],
};
const INTEGER: readonly Special[] = [...LIMITS, "scale", "bias", "enum"];

const REASONS: Record<Special, string> = {
  length: "length_not_allowed",
  bits: "member_not_allowed",
  fraction: "member_not_allowed",
  signed: "member_not_allowed",
  scale: "scale_not_allowed",
  bias: "scale_not_allowed",
  min: "limits_not_allowed",
  max: "limits_not_allowed",
  enum: "member_not_allowed",
  count: "member_not_allowed",
};

const WORDS: Record<Special, string> = {
  length: "a length; only ascii and bcd take one",
  bits: "a number of bits; only fixed takes one",
  fraction: "a fraction; only fixed takes one",
  signed: "a sign; only fixed takes one, other types have theirs in their name",
  scale: "a scale; only integers take one",
  bias: "a bias; only integers take one",
  min: "a limit; only numbers take one",
  max: "a limit; only numbers take one",
  enum: "names for its numbers; only integers of up to 32 bits take them",
  count: "a count; only numbers stand in arrays",
};

/** Members that the type does not take or lacks, and those that don't go together. */
export function lintMembers(field: LayoutField, add: Add): void {
  const split = "bits" in field.value;
  const taken = split ? [] : (TAKEN[field.type] ?? INTEGER);
  for (const key of SPECIAL) {
    if (field[key] === undefined || taken.includes(key)) continue;
    if (split) add(key, "member_not_allowed", `is made of bits and takes no “${key}” of its own`);
    else add(key, REASONS[key], `has ${WORDS[key]}`);
  }
  if (field.enum) lintNamed(field, add);
  if (field.type === "ascii" && field.length === undefined) add("length", "length_missing", "needs a length in bytes");
  if (field.type === "bcd" && !findFieldNumber(field)) {
    add("length", "length_missing", "needs a length of 1 to 7 bytes, two digits each");
  }
  if (field.type === "fixed") lintFixed(field, add);
}

/** A name stands for the stored number itself. */
function lintNamed(field: LayoutField, add: Add): void {
  for (const key of ["scale", "bias", "min", "max"] as const) {
    if (field[key] !== undefined) add(key, "member_not_allowed", `has names for its numbers and takes no “${key}”`);
  }
}

function lintFixed(field: LayoutField, add: Add): void {
  if (!findFieldNumber(field)) add("bits", "bits_missing", "needs its bits: 8, 16, 24 or 32");
  if (field.fraction === undefined) add("fraction", "fraction_missing", "needs the number of bits behind the point");
  if (field.signed === undefined) add("signed", "signed_missing", "needs “signed”, as firmware reads it either way");
}
