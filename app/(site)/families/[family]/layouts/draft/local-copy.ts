/** A text that this browser holds beside the server's, so that a closed tab or a lost line loses nothing. */
export interface LocalCopy {
  text: string;
  /** Draft that it was written over; absent for a layout that is not stored yet. */
  draft?: number;
  /** RFC 3339. */
  at: string;
}

const keyOf = (family: string, version: string | undefined) => `trimwright.layout.${family}.${version ?? "new"}`;

/** The copy of a layout's text; undefined where there is none or the browser keeps nothing. */
export function readCopy(family: string, version: string | undefined): LocalCopy | undefined {
  try {
    const stored: unknown = JSON.parse(localStorage.getItem(keyOf(family, version)) ?? "null");
    return isCopy(stored) ? stored : undefined;
  } catch {
    return undefined; // a browser that keeps nothing, or another program's text
  }
}

/** @returns false where the browser keeps nothing. */
export function writeCopy(family: string, version: string | undefined, copy: LocalCopy): boolean {
  try {
    localStorage.setItem(keyOf(family, version), JSON.stringify(copy));
    return true;
  } catch {
    return false; // full or forbidden: the server's copy is the only one then, and leaving the page warns
  }
}

export function dropCopy(family: string, version: string | undefined): void {
  try {
    localStorage.removeItem(keyOf(family, version));
  } catch {
    // A browser that keeps nothing has nothing to drop.
  }
}

function isCopy(value: unknown): value is LocalCopy {
  if (typeof value !== "object" || value === null || !("text" in value) || !("at" in value)) return false;
  return typeof value.text === "string" && typeof value.at === "string";
}
