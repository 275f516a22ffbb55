import { findFieldWidth, findNumberType, isHexPairs, type NumberType } from "@/builders/codec/field-types";
import { roundHalfEven } from "@/builders/codec/round-half-even";
import { isTextSource, SOURCE_NAMES } from "@/builders/codec/sources";
import type { Problem } from "@/lib/errors";
import type { LayoutField, SourceName } from "@/schemas/documents/layout";

/** What is wrong in one field on its own: type, scale, limits, source, constant. */
export function lintField(field: LayoutField, path: string): Problem[] {
  const problems: Problem[] = [];
  const add: Add = (tail, reason, message) =>
    problems.push({
      path: tail ? `${path}/${tail}` : path,
      code: `field.${reason}`,
      message: `“${field.name}” ${message}`,
    });
  const type = findNumberType(field.type);
  if (type) lintNumber(field, type, add);
  else lintPlain(field, add);
  lintValue(field, type, add);
  return problems;
}

type Add = (tail: string, reason: string, message: string) => void;

function lintNumber(field: LayoutField, type: NumberType, add: Add): void {
  if (field.length !== undefined) add("length", "length_not_allowed", "has a length; only ascii takes one");
  if (type.kind === "float") {
    if (field.scale !== undefined) add("scale", "scale_not_allowed", "has a scale; only integers take one");
    if (field.bias !== undefined) add("bias", "scale_not_allowed", "has a bias; only integers take one");
  } else if (field.scale === 0) {
    add("scale", "scale_zero", "has a scale of 0");
  }
  if (field.min !== undefined && field.max !== undefined && field.min > field.max) {
    add("min", "limits_inverted", "has a lower limit above its upper limit");
  }
  for (const end of ["min", "max"] as const) {
    const limit = field[end];
    if (limit !== undefined && !fits(field, type, limit)) {
      add(end, "type_too_narrow", `is too narrow: ${limit} does not fit into ${field.type} at this scale`);
    }
  }
}

function lintPlain(field: LayoutField, add: Add): void {
  for (const key of ["scale", "bias"] as const) {
    if (field[key] !== undefined) add(key, "scale_not_allowed", `has a ${key}; only integers take one`);
  }
  for (const key of ["min", "max"] as const) {
    if (field[key] !== undefined) add(key, "limits_not_allowed", "has a limit; only numbers take one");
  }
  if (field.type === "ascii" && field.length === undefined) add("length", "length_missing", "needs a length in bytes");
  if (field.type === "bytes" && field.length !== undefined) {
    add("length", "length_not_allowed", "has a length; bytes take theirs from the constant");
  }
}

function lintValue(field: LayoutField, type: NumberType | undefined, add: Add): void {
  if ("from" in field.value) lintSource(field, field.value.from, type, add);
  else if (type) lintNumberConstant(field, type, field.value.const, add);
  else lintPlainConstant(field, field.value.const, add);
}

function lintSource(field: LayoutField, from: SourceName, type: NumberType | undefined, add: Add): void {
  if (!SOURCE_NAMES.includes(from)) {
    add("value/from", "unknown_source", `names “${from}”, which is no source`);
  } else if (field.type === "bytes") {
    add("value", "source_type", "takes a constant only, being of type bytes");
  } else if (isTextSource(from) !== (type === undefined)) {
    add("value/from", "source_type", `is ${field.type}, but “${from}” is a ${isTextSource(from) ? "text" : "number"}`);
  }
}

function lintNumberConstant(field: LayoutField, type: NumberType, constant: number | string, add: Add): void {
  if (typeof constant !== "number") {
    add("value/const", "const_type", "needs a number");
    return;
  }
  if (!fits(field, type, constant)) {
    add("value/const", "const_out_of_range", `is ${constant}, which does not fit into ${field.type} at this scale`);
  }
  const { min = constant, max = constant } = field;
  if (constant < min || constant > max)
    add("value/const", "const_outside_limits", `is ${constant}, outside its limits`);
}

function lintPlainConstant(field: LayoutField, constant: number | string, add: Add): void {
  if (field.type === "bytes") {
    if (!isHexPairs(constant)) add("value/const", "const_type", "needs hex digits in pairs");
    return;
  }
  if (typeof constant !== "string") {
    add("value/const", "const_type", "needs a text");
    return;
  }
  if (!/^[\x20-\x7e]*$/.test(constant)) add("value/const", "const_type", "has characters outside printable ASCII");
  const width = findFieldWidth(field);
  if (width !== undefined && constant.length > width) {
    add("value/const", "const_out_of_range", `is longer than ${width} characters`);
  }
}

/** True where the value can be stored, by the encoder's own arithmetic. */
export function fits(field: Pick<LayoutField, "scale" | "bias">, type: NumberType, value: number): boolean {
  if (type.kind === "float") return type.width === 8 || Number.isFinite(Math.fround(value));
  // A scale of 0 has its own finding.
  if (field.scale === 0) return true;
  const stored = roundHalfEven((value - (field.bias ?? 0)) / (field.scale ?? 1));
  return stored >= type.min && stored <= type.max;
}
