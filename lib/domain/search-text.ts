import { SEAL_WORDS } from "@/lib/domain/seal-words";

/** What a search text may mean. All that applies is looked for. */
export interface SearchMeaning {
  /** Upper case, as codes and serials are. */
  code: string;
  /** A package by its version, of one lot where a code stands before it. */
  package?: { lot?: string; version: string };
  /** Hex digits that a package's digest begins with: given as such, or as words of its seal. */
  digest?: string;
}

const VERSION = /^(?:([A-Z0-9][A-Z0-9._-]{0,31})[ @/]+)?V?((?:0|[1-9]\d*)\.(?:0|[1-9]\d*)\.(?:0|[1-9]\d*))$/;
/** Fewer digits would be found in too many digests, and in serials. */
const DIGEST = /^[0-9a-f]{6,64}$/;
const SEAL_WORDS_MIN = 2;

/** Reads a search text: a serial or code, `LOT 1.2.0` or `1.2.0`, the beginning of a digest, or two to four words of a seal. */
export function readSearchText(text: string): SearchMeaning {
  const code = text.trim().toUpperCase();
  const meaning: SearchMeaning = { code };
  const version = VERSION.exec(code);
  if (version?.[2] !== undefined) meaning.package = { version: version[2], ...(version[1] && { lot: version[1] }) };
  const digest = DIGEST.test(code.toLowerCase()) ? code.toLowerCase() : sealDigits(code.toLowerCase());
  return digest === undefined ? meaning : { ...meaning, digest };
}

/** The hex digits that words of a seal stand for, in order from the first word. */
function sealDigits(text: string): string | undefined {
  const words = text.split(/[\s·,.-]+/).filter(Boolean);
  if (words.length < SEAL_WORDS_MIN || words.length > 4) return undefined;
  const bytes = words.map((word) => SEAL_WORDS.indexOf(word));
  if (bytes.includes(-1)) return undefined;
  return bytes.map((byte) => byte.toString(16).padStart(2, "0")).join("");
}
