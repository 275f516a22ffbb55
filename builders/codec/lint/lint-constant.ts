import { isHexPairs, type NumberType } from "@/builders/codec/field-types";
import type { Add } from "@/builders/codec/lint/lint-field";
import { fits, type Scaled } from "@/builders/codec/lint/lint-scaled";
import { isWideText, wideEnds } from "@/builders/codec/wide-integer";
import type { Constant, FieldType } from "@/schemas/documents/layout";

interface Judged extends Scaled {
  type: FieldType;
  length?: number;
}

/** One constant against what its field takes. The tail that `add` gets is empty. */
export function lintConstant(part: Judged, type: NumberType | undefined, constant: Constant, add: Add): void {
  if (part.enum) lintName(part.enum, constant, add);
  else if (type?.kind === "wide") lintWide(part, constant, add);
  else if (type) lintNumber(part, type, constant, add);
  else if (part.type === "bytes") {
    if (!isHexPairs(constant)) add("", "const_type", "needs hex digits in pairs");
  } else if (part.type === "ascii") lintText(part, constant, add);
}

function lintName(names: NonNullable<Scaled["enum"]>, constant: Constant, add: Add): void {
  const known = typeof constant === "string" ? Object.hasOwn(names, constant) : Object.values(names).includes(constant);
  if (!known) add("", "const_not_named", `is “${constant}”, none of ${Object.keys(names).join(", ")}`);
}

function lintNumber(part: Judged, type: NumberType, constant: Constant, add: Add): void {
  if (typeof constant !== "number") {
    add("", "const_type", "needs a number");
    return;
  }
  if (!fits(part, type, constant)) {
    add("", "const_out_of_range", `is ${constant}, which does not fit into ${part.type} at this scale`);
  }
  lintLimits(part, constant, add);
}

/** 64 bits: decimal digits, or a number that binary64 holds exactly. */
function lintWide(part: Judged, constant: Constant, add: Add): void {
  if (!(typeof constant === "number" ? Number.isSafeInteger(constant) : isWideText(constant))) {
    add("", "const_type", "needs a whole number; beyond 9007199254740991 as decimal digits in quotes");
    return;
  }
  const { min, max } = wideEnds(part.type);
  const value = BigInt(constant);
  if (value < min || value > max) add("", "const_out_of_range", `is ${constant}, which does not fit into ${part.type}`);
  lintLimits(part, value, add);
}

function lintLimits({ min, max }: Judged, value: number | bigint, add: Add): void {
  if ((min !== undefined && value < min) || (max !== undefined && value > max)) {
    add("", "const_outside_limits", `is ${value}, outside its limits`);
  }
}

function lintText({ length }: Judged, constant: Constant, add: Add): void {
  if (typeof constant !== "string") {
    add("", "const_type", "needs a text");
    return;
  }
  if (!/^[\x20-\x7e]*$/.test(constant)) add("", "const_type", "has characters outside printable ASCII");
  if (length !== undefined && constant.length > length) {
    add("", "const_out_of_range", `is longer than ${length} characters`);
  }
}
