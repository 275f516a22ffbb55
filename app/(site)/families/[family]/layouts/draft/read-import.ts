import { LAYOUT_MAX_BYTES } from "@/schemas/api/layouts";

/** A file's text to go on with, or in words why it is not taken. */
export type Imported = { text: string } | { refusal: string };

/** Deeper than any layout is; what is nested without end is no layout. */
const DEPTH_MAX = 12;

/** Reads a layout file as it is: its text is kept, and what is wrong in it is left to the lint. Nothing in it is run. */
export function readImport(bytes: Uint8Array): Imported {
  if (bytes.length > LAYOUT_MAX_BYTES) {
    return { refusal: `The file has ${bytes.length.toLocaleString("en")} bytes; a layout takes at most 1 MiB.` };
  }
  const text = decode(bytes);
  if (text === undefined)
    return { refusal: "The file is not text in UTF-8. Export a layout as .json and take that file." };
  if (text.includes("\0")) return { refusal: "The file holds NUL characters, so it is no JSON text." };
  const document = parse(text);
  if (document === undefined)
    return { refusal: "The file is not JSON. A layout's file begins with { and ends with }." };
  if (typeof document !== "object" || document === null || Array.isArray(document)) {
    return { refusal: "The file is JSON, but no layout: a layout is an object with memory, fields and checksums." };
  }
  if (isTooDeep(document, DEPTH_MAX)) return { refusal: "The file is nested more deeply than any layout." };
  if (!("format" in document) || document.format !== "trimwright/layout@1") {
    return { refusal: "The file does not name the format “trimwright/layout@1”, so it is no layout of this kind." };
  }
  return { text };
}

function decode(bytes: Uint8Array): string | undefined {
  try {
    return new TextDecoder("utf-8", { fatal: true }).decode(bytes);
  } catch {
    return undefined; // said in words above
  }
}

function parse(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return undefined; // said in words above
  }
}

function isTooDeep(value: unknown, left: number): boolean {
  if (typeof value !== "object" || value === null) return false;
  return left === 0 || Object.values(value).some((inner) => isTooDeep(inner, left - 1));
}
