import { AppError } from "@/lib/errors";

/** Offsets of the first and the last byte, both inclusive. */
export interface ByteRange {
  first: number;
  last: number;
}

/**
 * The one range that a `Range` field asks for (RFC 9110, section 14). Several ranges at once, other units and what cannot be
 * read are left unheeded, as that section allows: the whole is sent.
 * @param length bytes of the representation.
 * @returns null where the whole is to be sent.
 * @throws AppError `request.range_invalid` {length} where no byte of the range is there.
 */
export function readRange(field: string | null, length: number): ByteRange | null {
  const [, from = "", to = ""] = /^bytes=[ \t]*(\d*)-(\d*)[ \t]*$/i.exec(field ?? "") ?? [];
  if (from === "" && to === "") return null;
  if (from === "") return suffixRange(Number(to), length);
  const first = Number(from);
  const last = to === "" ? length - 1 : Math.min(Number(to), length - 1);
  if (to !== "" && Number(to) < first) return null;
  if (first >= length) throw outside(length);
  return { first, last };
}

function suffixRange(bytes: number, length: number): ByteRange {
  if (bytes === 0 || length === 0) throw outside(length);
  return { first: Math.max(0, length - bytes), last: length - 1 };
}

function outside(length: number): AppError {
  return new AppError("request.range_invalid", {
    length,
    message: `There are ${length} bytes, none of them in the range.`,
  });
}

/**
 * Whether a list of entity tags as in `If-None-Match` names this one, by the weak comparison (RFC 9110, section 8.8.3.2);
 * `*` names every one.
 */
export function namesTag(field: string | null, tag: string): boolean {
  if (field === null) return false;
  if (field.trim() === "*") return true;
  const listed = field.match(/(?:W\/)?"[^"]*"/g) ?? [];
  return listed.some((one) => one.replace(/^W\//, "") === tag);
}

/** Whether a range may be sent: no `If-Range`, or one with this very tag. A date or a weak tag never holds, as we send neither. */
export function allowsRange(ifRange: string | null, tag: string): boolean {
  return ifRange === null || ifRange.trim() === tag;
}
