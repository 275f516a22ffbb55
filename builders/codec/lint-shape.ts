import { findNumberType } from "@/builders/codec/field-types";
import type { Problem } from "@/lib/errors";
import type { ByteRange, LayoutChecksum, LayoutDocument, LayoutField } from "@/schemas/documents/layout";

/** The parts of a document that have the shape to be judged further, each with its JSON pointer. */
export interface ReadableLayout {
  layout: LayoutDocument;
  paths: { fields: string[]; checksums: string[]; kept: string[] };
}

type Loose = Record<string, unknown>;

/**
 * Sorts out what of a document can be judged. The JSON Schema is the full judge of shape; this is the part of it that
 * later rules rest on, so that they work on a half-typed document in the browser too.
 * @returns `readable` undefined where there is no memory, fields or checksums to speak of.
 */
export function readLayout(document: unknown): { readable?: ReadableLayout; problems: Problem[] } {
  const problems: Problem[] = [];
  const shape = (path: string, message: string) => problems.push({ path, code: "layout.shape", message });
  if (!isObject(document)) return { problems: [{ path: "", code: "layout.shape", message: "is not an object" }] };
  if (!isMemory(document.memory)) shape("/memory", "needs bytes, pageBytes, baseAddress, fill and byteOrder");
  if (!Array.isArray(document.fields)) shape("/fields", "is not a list");
  if (!Array.isArray(document.checksums)) shape("/checksums", "is not a list");
  if (document.kept !== undefined && !Array.isArray(document.kept)) shape("/kept", "is not a list");
  if (document.order !== 1 && document.order !== 2) shape("/order", "must be 1 or 2");
  if (problems.length > 0) return { problems };

  const paths = { fields: [] as string[], checksums: [] as string[], kept: [] as string[] };
  const pick = <T>(list: unknown, name: keyof typeof paths, test: (part: unknown) => string | null): T[] =>
    (list as unknown[]).filter((part, i) => {
      const wrong = test(part);
      if (wrong !== null) shape(`/${name}/${i}`, wrong);
      else paths[name].push(`/${name}/${i}`);
      return wrong === null;
    }) as T[];
  const fields = pick<LayoutField>(document.fields, "fields", wrongInField);
  const checksums = pick<LayoutChecksum>(document.checksums, "checksums", wrongInChecksum);
  const kept = pick<ByteRange>(document.kept ?? [], "kept", (part) =>
    isRange(part) ? null : "is not a range [from, to]",
  );
  return {
    readable: { layout: { ...(document as unknown as LayoutDocument), fields, checksums, kept }, paths },
    problems,
  };
}

function isObject(value: unknown): value is Loose {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

function isCount(value: unknown, min: number, max: number): boolean {
  return Number.isInteger(value) && (value as number) >= min && (value as number) <= max;
}

function isByteOrder(value: unknown): boolean {
  return value === "little" || value === "big";
}

function isMemory(memory: unknown): boolean {
  return (
    isObject(memory) &&
    isCount(memory.bytes, 1, 65536) &&
    isCount(memory.pageBytes, 1, 65536) &&
    isCount(memory.baseAddress, 0, 2 ** 32 - 1) &&
    isCount(memory.fill, 0, 255) &&
    isByteOrder(memory.byteOrder)
  );
}

function isRange(value: unknown): boolean {
  return Array.isArray(value) && value.length === 2 && value.every((end) => isCount(end, 0, 65535));
}

function isNumberOrAbsent(value: unknown): boolean {
  return value === undefined || (typeof value === "number" && Number.isFinite(value));
}

function wrongInField(field: unknown): string | null {
  if (!isObject(field)) return "is not an object";
  if (typeof field.name !== "string" || field.name === "") return "needs a name";
  if (!isCount(field.at, 0, 65535)) return "needs an offset “at”, a whole number from 0";
  const type = field.type;
  if (typeof type !== "string" || !(findNumberType(type) || type === "ascii" || type === "bytes")) {
    return "needs a type: u8 i8 u16 i16 u24 i24 u32 i32 f32 f64 ascii or bytes";
  }
  if (field.length !== undefined && !isCount(field.length, 1, 65536)) return "“length” must be a whole number from 1";
  if (field.byteOrder !== undefined && !isByteOrder(field.byteOrder)) return "“byteOrder” must be little or big";
  const numbers = ["scale", "bias", "min", "max"].find((key) => !isNumberOrAbsent(field[key]));
  if (numbers !== undefined) return `“${numbers}” must be a number`;
  return isFieldValue(field.value) ? null : "“value” must be {from: a source} or {const: a number or text}";
}

function isFieldValue(value: unknown): boolean {
  if (!isObject(value) || Object.keys(value).length !== 1) return false;
  if ("from" in value) return typeof value.from === "string";
  return typeof value.const === "string" || (typeof value.const === "number" && Number.isFinite(value.const));
}

function wrongInChecksum(checksum: unknown): string | null {
  if (!isObject(checksum)) return "is not an object";
  if (typeof checksum.name !== "string" || checksum.name === "") return "needs a name";
  if (!isCount(checksum.at, 0, 65535)) return "needs an offset “at”, a whole number from 0";
  if (typeof checksum.algorithm !== "string") return "needs an algorithm by its catalogue name";
  if (checksum.byteOrder !== undefined && !isByteOrder(checksum.byteOrder)) return "“byteOrder” must be little or big";
  return isRange(checksum.over) ? null : "“over” must be a range [from, to]";
}
