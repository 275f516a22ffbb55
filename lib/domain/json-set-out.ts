/** Texts, signs and bare words of JSON (RFC 8259, section 2), each as written. */
const TOKEN = /"(?:[^"\\]|\\.)*"|[{}[\],:]|[^\s{}[\],:"]+/g;

/**
 * A JSON text that was written without line breaks, set out to be read: members of the outermost object on a line each, items
 * of their lists of objects too, all else on one line. Every name, text and number stays as written, so the document stays
 * the same.
 * @returns the text as it is where it has line breaks of its own, or is not JSON.
 */
export function setOut(text: string): string {
  if (/[\r\n]/.test(text.trim()) || !isJson(text)) return text;
  return `${new Writer(text.match(TOKEN) ?? []).value(0)}\n`;
}

function isJson(text: string): boolean {
  try {
    JSON.parse(text);
    return true;
  } catch {
    return false; // half a thought is shown as it was typed
  }
}

class Writer {
  private at = 0;
  constructor(private readonly tokens: readonly string[]) {}

  /** Writes the next value. @param depth of what stands around it. */
  value(depth: number): string {
    const first = this.next();
    if (first !== "{" && first !== "[") return first;
    const close = first === "{" ? "}" : "]";
    // Lists of what is no object, such as a range, are short.
    const broken = first === "{" ? depth === 0 : depth === 1 && this.tokens[this.at] === "{";
    const parts: string[] = [];
    while (this.tokens[this.at] !== close) {
      parts.push(first === "{" ? this.member(depth + 1) : this.value(depth + 1));
      if (this.tokens[this.at] === ",") this.at += 1;
    }
    this.at += 1;
    if (parts.length === 0) return first + close;
    if (!broken) return first === "{" ? `{ ${parts.join(", ")} }` : `[${parts.join(", ")}]`;
    const indent = "  ".repeat(depth + 1);
    return `${first}\n${parts.map((part) => indent + part).join(",\n")}\n${indent.slice(2)}${close}`;
  }

  private member(depth: number): string {
    const name = this.next();
    this.at += 1; // the colon
    return `${name}: ${this.value(depth)}`;
  }

  private next(): string {
    return this.tokens[this.at++] as string;
  }
}
