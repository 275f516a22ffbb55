import { findFieldNumber, isNumeric, type NumberType, scaleOf } from "@/builders/codec/field-types";
import { lintBits } from "@/builders/codec/lint/lint-bits";
import { lintConstant } from "@/builders/codec/lint/lint-constant";
import { lintMembers } from "@/builders/codec/lint/lint-members";
import { lintScaled } from "@/builders/codec/lint/lint-scaled";
import { isTextSource, SOURCE_NAMES } from "@/builders/codec/sources";
import type { Problem } from "@/lib/errors";
import type { LayoutField, SourceName } from "@/schemas/documents/layout";

export { fits } from "@/builders/codec/lint/lint-scaled";

/** Notes one finding: where behind the part's own pointer, the code's reason, and what the part does or has. */
export type Add = (tail: string, reason: string, message: string) => void;

/** What is wrong in one field on its own: type, size, scale, limits, source, constant, bits. */
export function lintField(field: LayoutField, path: string): Problem[] {
  const problems: Problem[] = [];
  const add: Add = (tail, reason, message) =>
    problems.push({
      path: tail ? `${path}/${tail}` : path,
      code: `field.${reason}`,
      message: `“${field.name}” ${message}`,
    });
  lintMembers(field, add);
  const type = findFieldNumber(field);
  if (type) lintScaled({ ...field, scale: scaleOf(field) }, type, field.type, add);
  if ("bits" in field.value) lintBits(field, field.value.bits, add);
  else if ("from" in field.value) lintSource(field, field.value.from, add);
  else lintConstants(field, type, field.value.const, add);
  return problems;
}

function lintSource(field: LayoutField, from: SourceName, add: Add): void {
  if (!SOURCE_NAMES.includes(from)) {
    add("value/from", "unknown_source", `names “${from}”, which is no source`);
  } else if (field.type === "bytes") {
    add("value", "source_type", "takes a constant only, being of type bytes");
  } else if (isTextSource(from) === isNumeric(field.type)) {
    add("value/from", "source_type", `is ${field.type}, but “${from}” is a ${isTextSource(from) ? "text" : "number"}`);
  }
}

function lintConstants(
  field: LayoutField,
  type: NumberType | undefined,
  constants: number | string | (number | string)[],
  add: Add,
): void {
  const judged = { ...field, scale: scaleOf(field) };
  if (!Array.isArray(constants)) {
    lintConstant(judged, type, constants, (_, reason, message) => add("value/const", reason, message));
    return;
  }
  if (constants.length !== field.count) {
    const count = field.count === undefined ? "is no array" : `has ${field.count} elements`;
    add("value/const", "const_count", `${count}, but its list has ${constants.length}`);
  }
  constants.forEach((constant, i) => {
    lintConstant(judged, type, constant, (_, reason, message) => add(`value/const/${i}`, reason, message));
  });
}
