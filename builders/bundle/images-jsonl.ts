import type { DecodedField } from "@/builders/codec/image";
import { AppError } from "@/lib/errors";

/** One device in `images.jsonl`. */
export interface ImageValues {
  serial: string;
  /** Id of the derivation that the coefficients come from. */
  derivation: string;
  /** Of the image's bytes, kept ranges taken as fill. */
  sha256: string;
  fields: readonly DecodedField[];
}

/**
 * One line of `images.jsonl`, RFC 8785, with the LF that ends it; the file is all lines. Members are written in canonical order and texts of an
 * image are ASCII, so that JSON.stringify gives the canonical form at ten times the speed of sorting.
 */
export function imageLine({ serial, derivation, sha256, fields }: ImageValues): string {
  const ordered = fields.map(({ at, name, raw, unit, value }) => ({ at, name, raw, unit, value }));
  return `${JSON.stringify({ derivation, fields: ordered, serial, sha256 })}\n`;
}

/** Reads `images.jsonl`. @throws AppError `bundle.values_malformed` {line} */
export function readImagesJsonl(text: string): ImageValues[] {
  const lines = text.split("\n");
  if (lines.pop() !== "") throw malformed(lines.length + 1);
  return lines.map((line, i) => readLine(line, i + 1));
}

function readLine(text: string, line: number): ImageValues {
  const value = parse(text, line);
  const isText = (key: string) => typeof value[key] === "string";
  if (!isText("serial") || !isText("derivation") || !isText("sha256") || !Array.isArray(value.fields))
    throw malformed(line);
  return value as unknown as ImageValues;
}

function parse(text: string, line: number): Record<string, unknown> {
  try {
    const value: unknown = JSON.parse(text);
    if (typeof value === "object" && value !== null) return value as Record<string, unknown>;
  } catch (cause) {
    throw malformed(line, cause);
  }
  throw malformed(line);
}

function malformed(line: number, cause?: unknown): AppError {
  const message = `images.jsonl: line ${line} is not the values of a device`;
  return new AppError("bundle.values_malformed", { line, message }, { cause });
}
