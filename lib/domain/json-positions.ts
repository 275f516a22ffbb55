/** Where a value stands in a JSON text: offsets of its first character and of the one after its last. */
export interface JsonSpan {
  from: number;
  end: number;
  /** Where its name begins, for a member of an object. */
  keyFrom?: number;
}

/**
 * The place of every value of a JSON text (RFC 8259) by its JSON pointer (RFC 6901), for marking findings in an editor.
 * A text that is not JSON gives the places up to where it stops being it; of a member named twice the last one counts.
 */
export function jsonPositions(text: string): ReadonlyMap<string, JsonSpan> {
  const spans = new Map<string, JsonSpan>();
  new Scanner(text, spans).value("");
  return spans;
}

/** The span of a pointer, or of the nearest value around it that is there; the whole text where none is. */
export function nearestSpan(spans: ReadonlyMap<string, JsonSpan>, pointer: string): JsonSpan {
  let path = pointer;
  while (path !== "" && !spans.has(path)) path = path.slice(0, path.lastIndexOf("/"));
  return spans.get(path) ?? { from: 0, end: 0 };
}

/** Line and column of an offset, both from 1. */
export type LineFinder = (offset: number) => { line: number; column: number };

/** Finds lines of a text; its line starts are looked up once, however many offsets are asked for. */
export function lineFinder(text: string): LineFinder {
  const starts = [0];
  for (let at = text.indexOf("\n"); at >= 0; at = text.indexOf("\n", at + 1)) starts.push(at + 1);
  return (offset) => {
    let low = 0;
    let high = starts.length - 1;
    while (low < high) {
      const middle = Math.ceil((low + high) / 2);
      if ((starts[middle] as number) <= offset) low = middle;
      else high = middle - 1;
    }
    return { line: low + 1, column: offset - (starts[low] as number) + 1 };
  };
}

/** Deeper nesting is nobody's document; without an end it would use up the stack. */
const DEPTH_MAX = 200;

class Scanner {
  private at = 0;
  private depth = 0;
  constructor(
    private readonly text: string,
    private readonly spans: Map<string, JsonSpan>,
  ) {}

  /** Reads one value and notes its place. @returns whether it was one. */
  value(pointer: string, keyFrom?: number): boolean {
    this.space();
    const from = this.at;
    const first = this.text[from];
    const read =
      first === "{" ? this.members(pointer) : first === "[" ? this.items(pointer) : this.scalar() !== undefined;
    this.spans.set(pointer, { from, end: this.at, ...(keyFrom === undefined ? {} : { keyFrom }) });
    return read;
  }

  private members(pointer: string): boolean {
    return this.list("}", () => {
      this.space();
      const keyFrom = this.at;
      const key = this.scalar();
      if (key === undefined || !key.startsWith('"')) return false;
      this.space();
      return this.skip(":") && this.value(`${pointer}/${pointerToken(key)}`, keyFrom);
    });
  }

  private items(pointer: string): boolean {
    let index = 0;
    return this.list("]", () => this.value(`${pointer}/${index++}`));
  }

  /** What stands between the opening sign, commas and the closing one. */
  private list(close: string, part: () => boolean): boolean {
    this.at += 1;
    this.space();
    if (this.skip(close)) return true;
    this.depth += 1;
    if (this.depth > DEPTH_MAX) return false;
    do {
      if (!part()) return false;
      this.space();
    } while (this.skip(","));
    this.depth -= 1;
    return this.skip(close);
  }

  /** A text, number or word as written; undefined where none stands. */
  private scalar(): string | undefined {
    const pattern = /"(?:[^"\\\n]|\\.)*"|-?\d[\d.eE+-]*|true|false|null/y;
    pattern.lastIndex = this.at;
    const found = pattern.exec(this.text)?.[0];
    this.at += found?.length ?? 0;
    return found;
  }

  private skip(sign: string): boolean {
    if (this.text[this.at] !== sign) return false;
    this.at += 1;
    return true;
  }

  private space(): void {
    for (let code = this.text.charCodeAt(this.at); isSpace(code); code = this.text.charCodeAt(this.at)) this.at += 1;
  }
}

/** Tab, line feed, carriage return or space (RFC 8259, section 2). */
const isSpace = (code: number) => code === 32 || code === 10 || code === 13 || code === 9;

function pointerToken(key: string): string {
  let name = key.slice(1, -1);
  try {
    name = JSON.parse(key) as string;
  } catch {
    // A key with a wrong escape keeps its raw text: its value is still found, and JSON.parse reports the escape itself.
  }
  return name.replaceAll("~", "~0").replaceAll("/", "~1");
}
