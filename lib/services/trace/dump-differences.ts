import type { CompiledField, CompiledLayout } from "@/builders/codec/compile-layout";
import { compareImages } from "@/builders/codec/difference";
import { type DecodedField, decodeImage, imageDigestBytes } from "@/builders/codec/image";
import { readBits } from "@/builders/codec/stored-integer";
import type { DumpResult } from "@/schemas/api/devices";

type Difference = DumpResult["differences"][number];

/**
 * The bytes in which memory differs from an image, with the values that they belong to. A byte that parts of an integer's
 * bits share stands once for each part whose bits differ in it; where no part names them, the integer has no value.
 * @param expected the image. @param actual the memory; what is kept by the device is not compared.
 */
export function differencesOf(layout: CompiledLayout, expected: Uint8Array, actual: Uint8Array): Difference[] {
  const before = decodeImage(layout, expected);
  const after = new Map(decodeImage(layout, imageDigestBytes(layout, actual)).map((field) => [field.name, field]));
  const parts = new Map(layout.fields.map((field) => [field.name, field]));
  return compareImages({ layout, bytes: expected }, { layout, bytes: actual }).bytes.flatMap(({ at, from, to }) => {
    const place = { at, expected: hex(from), actual: hex(to) };
    const holders = before.filter((field) => at >= field.at && at < field.at + field.raw.length / 2);
    const [first] = holders;
    if (!first || !parts.get(first.name)?.bits) return [{ ...place, ...valuesOf(first, after) }];
    const changed = holders.filter(({ name }) => hasOtherBits(parts.get(name), expected, at, to));
    if (changed.length > 0) return changed.map((field) => ({ ...place, ...valuesOf(field, after) }));
    const integer = first.name.slice(0, first.name.lastIndexOf("."));
    return [{ ...place, field: integer, expectedValue: null, actualValue: null, unit: null }];
  });
}

const hex = (byte: number | null) => (byte === null ? "" : byte.toString(16).padStart(2, "0"));

function valuesOf(field: DecodedField | undefined, after: ReadonlyMap<string, DecodedField>) {
  return {
    field: field?.name ?? null,
    expectedValue: field?.value ?? null,
    actualValue: (field && after.get(field.name)?.value) ?? null,
    unit: field?.unit ?? null,
  };
}

/** Whether a part's bits differ in that one byte. */
function hasOtherBits(part: CompiledField | undefined, expected: Uint8Array, at: number, to: number | null): boolean {
  if (!part?.bits || to === null) return false;
  // No slice: of a Buffer, as the database gives it, that is a view.
  const turned = Uint8Array.from(expected);
  turned[at] = to;
  return readBits(expected, part, part.bits) !== readBits(turned, part, part.bits);
}
