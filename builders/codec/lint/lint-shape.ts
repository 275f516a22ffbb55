import { isFieldType } from "@/builders/codec/field-types";
import { isByteOrder, isCount, isObject, isRange, type Loose } from "@/builders/codec/json-shape";
import { wrongInAlgorithm, wrongInCovered, wrongInForbidden } from "@/builders/codec/lint/lint-shape-checksum";
import { wrongInNumbers, wrongInValue } from "@/builders/codec/lint/lint-shape-value";
import type { LayoutPaths } from "@/builders/codec/memory-map";
import type { Problem } from "@/lib/errors";
import type { ByteRange, LayoutChecksum, LayoutDocument, LayoutField } from "@/schemas/documents/layout";

/** The parts of a document that have the shape to be judged further, each with its JSON pointer. */
export interface ReadableLayout {
  layout: LayoutDocument;
  paths: LayoutPaths;
}

/** Most elements of an array: each is a value of its own in lists and comparisons. */
const COUNT_MAX = 1024;
const FRACTION_MAX = 64;

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
  else if (!isSegments(document.memory.segments)) shape("/memory/segments", "is not a list of {at, baseAddress}");
  if (!Array.isArray(document.fields)) shape("/fields", "is not a list");
  if (!Array.isArray(document.checksums)) shape("/checksums", "is not a list");
  for (const list of ["kept", "reserved"]) {
    if (document[list] !== undefined && !Array.isArray(document[list])) shape(`/${list}`, "is not a list");
  }
  if (document.order !== 1 && document.order !== 2) shape("/order", "must be 1 or 2");
  if (problems.length > 0) return { problems };

  const paths: LayoutPaths = { fields: [], checksums: [], kept: [], reserved: [] };
  const pick = <T>(name: keyof LayoutPaths, test: (part: unknown) => string | null): T[] =>
    ((document[name] ?? []) as unknown[]).filter((part, i) => {
      const wrong = test(part);
      if (wrong !== null) shape(`/${name}/${i}`, wrong);
      else paths[name].push(`/${name}/${i}`);
      return wrong === null;
    }) as T[];
  const wrongInRange = (part: unknown) => (isRange(part) ? null : "is not a range [from, to]");
  const parts = {
    fields: pick<LayoutField>("fields", wrongInField),
    checksums: pick<LayoutChecksum>("checksums", wrongInChecksum),
    kept: pick<ByteRange>("kept", wrongInRange),
    reserved: pick<ByteRange>("reserved", wrongInRange),
  };
  return { readable: { layout: { ...(document as unknown as LayoutDocument), ...parts }, paths }, problems };
}

function isMemory(memory: unknown): memory is Loose {
  return (
    isObject(memory) &&
    isCount(memory.bytes, 1, 65536) &&
    isCount(memory.pageBytes, 1, 65536) &&
    isCount(memory.baseAddress, 0, 2 ** 32 - 1) &&
    isCount(memory.fill, 0, 255) &&
    isByteOrder(memory.byteOrder)
  );
}

function isSegments(segments: unknown): boolean {
  if (segments === undefined) return true;
  const isSegment = (one: unknown) =>
    isObject(one) && isCount(one.at, 1, 65535) && isCount(one.baseAddress, 0, 2 ** 32 - 1);
  return Array.isArray(segments) && segments.every(isSegment);
}

function wrongInField(field: unknown): string | null {
  if (!isObject(field)) return "is not an object";
  if (typeof field.name !== "string" || field.name === "") return "needs a name";
  if (!isCount(field.at, 0, 65535)) return "needs an offset “at”, a whole number from 0";
  if (!isFieldType(field.type)) {
    return "needs a type: u8 i8 u16 i16 u24 i24 u32 i32 u64 i64 f32 f64 fixed bcd ascii or bytes";
  }
  if (field.byteOrder !== undefined && !isByteOrder(field.byteOrder)) return "“byteOrder” must be little or big";
  return wrongInSize(field) ?? wrongInNumbers(field) ?? wrongInValue(field.value);
}

function wrongInSize({ length, bits, fraction, signed, count }: Loose): string | null {
  if (length !== undefined && !isCount(length, 1, 65536)) return "“length” must be a whole number from 1";
  if (bits !== undefined && !isCount(bits, 1, 64)) return "“bits” must be a whole number from 1";
  if (fraction !== undefined && !isCount(fraction, 0, FRACTION_MAX)) {
    return `“fraction” must be a whole number from 0 to ${FRACTION_MAX}`;
  }
  if (signed !== undefined && typeof signed !== "boolean") return "“signed” must be true or false";
  if (count === undefined || isCount(count, 1, COUNT_MAX)) return null;
  return `“count” must be a whole number from 1 to ${COUNT_MAX}`;
}

function wrongInChecksum(checksum: unknown): string | null {
  if (!isObject(checksum)) return "is not an object";
  if (typeof checksum.name !== "string" || checksum.name === "") return "needs a name";
  if (!isCount(checksum.at, 0, 65535)) return "needs an offset “at”, a whole number from 0";
  if (checksum.byteOrder !== undefined && !isByteOrder(checksum.byteOrder)) return "“byteOrder” must be little or big";
  return wrongInAlgorithm(checksum.algorithm) ?? wrongInCovered(checksum.over) ?? wrongInForbidden(checksum);
}
