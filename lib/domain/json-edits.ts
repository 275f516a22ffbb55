import { type JsonSpan, jsonPositions } from "@/lib/domain/json-positions";

/** Replaces the characters from `from` up to, not including, `end`. */
export interface TextEdit {
  from: number;
  end: number;
  text: string;
}

/** The text with all edits done; offsets are those of the text before. @throws Error where two overlap. */
export function applyEdits(text: string, edits: readonly TextEdit[]): string {
  const rising = [...edits].sort((a, b) => a.from - b.from || a.end - b.end);
  let result = "";
  let next = 0;
  for (const { from, end, text: put } of rising) {
    if (from < next) throw new Error(`edits overlap at ${from}`);
    result += text.slice(next, from) + put;
    next = end;
  }
  return result + text.slice(next);
}

/**
 * Edits of a JSON text that touch nothing but what they change: spaces, line breaks, the writing of numbers and the order of
 * members stay the author's own. Every function takes the text and JSON pointers (RFC 6901) and gives edits, none where the
 * place is not there; values are JSON as it should be written.
 */
export class JsonEditor {
  private readonly spans: ReadonlyMap<string, JsonSpan>;
  private readonly children = new Map<string, string[]>();

  constructor(private readonly text: string) {
    this.spans = jsonPositions(text);
    for (const pointer of this.spans.keys()) {
      if (pointer === "") continue;
      const parent = pointer.slice(0, pointer.lastIndexOf("/"));
      const list = this.children.get(parent);
      if (list) list.push(pointer);
      else this.children.set(parent, [pointer]);
    }
  }

  /** The text of a value as written; undefined where there is none. */
  raw(pointer: string): string | undefined {
    const span = this.spans.get(pointer);
    return span && this.text.slice(span.from, span.end);
  }

  /**
   * Gives a member a value: replaced where it is there, else put in behind the last member that `order` names before it.
   * @param raw JSON; undefined takes the member out.
   */
  set(object: string, name: string, raw: string | undefined, order: readonly string[] = []): TextEdit[] {
    const pointer = `${object}/${tokenOf(name)}`;
    const span = this.spans.get(pointer);
    if (raw === undefined) return span ? this.remove(pointer) : [];
    if (span) return this.raw(pointer) === raw ? [] : [{ from: span.from, end: span.end, text: raw }];
    const members = this.children.get(object) ?? [];
    const rank = order.indexOf(name);
    const isEarlier = (one: string) => rankOf(one, order) >= 0 && rankOf(one, order) < rank;
    const earlier = rank < 0 ? members : members.filter(isEarlier);
    return this.insertBehind(object, earlier.at(-1), `${JSON.stringify(name)}: ${raw}`);
  }

  /** Puts a value into a list, at `index` or at its end, written in the manner of its neighbours. */
  insert(list: string, value: unknown, index = Number.POSITIVE_INFINITY): TextEdit[] {
    const items = this.children.get(list) ?? [];
    const at = Math.min(index, items.length);
    const sibling = items[Math.min(at, items.length - 1)];
    return this.insertBehind(list, items[at - 1], this.written(value, sibling));
  }

  /** Takes a member or a list's item out, with its comma. */
  remove(pointer: string): TextEdit[] {
    const siblings = this.children.get(pointer.slice(0, pointer.lastIndexOf("/"))) ?? [];
    const at = siblings.indexOf(pointer);
    const own = this.spans.get(pointer);
    if (at < 0 || !own) return [];
    const next = this.spans.get(siblings[at + 1] ?? "/");
    if (next) return [{ from: startOf(own), end: startOf(next), text: "" }];
    const previous = this.spans.get(siblings[at - 1] ?? "/");
    return [{ from: previous ? previous.end : startOf(own), end: own.end, text: "" }];
  }

  /** Moves a list's item to another place; what stands between the items stays. */
  move(list: string, from: number, to: number): TextEdit[] {
    const items = this.children.get(list) ?? [];
    if (from === to || !items[from] || !items[to]) return [];
    const order = items.map((_, i) => i);
    order.splice(to, 0, ...order.splice(from, 1));
    return order.flatMap((source, i) => {
      const slot = this.spans.get(items[i] as string);
      return source === i || !slot ? [] : [{ ...slotOf(slot), text: this.raw(items[source] as string) as string }];
    });
  }

  private insertBehind(container: string, previous: string | undefined, written: string): TextEdit[] {
    const outer = this.spans.get(container);
    if (!outer) return [];
    const before = this.spans.get(previous ?? "/");
    if (before) return [{ from: before.end, end: before.end, text: `,${this.gapIn(container)}${written}` }];
    const first = this.spans.get(this.children.get(container)?.[0] ?? "/");
    if (first) return [{ from: startOf(first), end: startOf(first), text: `${written},${this.gapIn(container)}` }];
    return [{ from: outer.from + 1, end: outer.from + 1, text: written }];
  }

  /** What goes between the container's parts: a space, or a line break with its indent. */
  private gapIn(container: string): string {
    const parts = this.children.get(container) ?? [];
    const last = this.spans.get(parts.at(-1) ?? "/");
    if (!last) return " ";
    const gap = this.spaceBefore(startOf(last));
    return gap.includes("\n") ? gap : " ";
  }

  private spaceBefore(offset: number): string {
    return /[ \t\r\n]*$/.exec(this.text.slice(0, offset))?.[0] ?? "";
  }

  /** A value over several lines where its neighbour takes several, else on one. */
  private written(value: unknown, sibling: string | undefined): string {
    const span = this.spans.get(sibling ?? "/");
    const child = this.spans.get(this.children.get(sibling ?? "/")?.[0] ?? "/");
    if (!span || !child) return onOneLine(value);
    const inner = this.spaceBefore(startOf(child));
    if (!inner.includes("\n")) return onOneLine(value);
    const outer = this.spaceBefore(startOf(span)).split("\n").at(-1) ?? "";
    const step = inner.split("\n").at(-1)?.slice(outer.length) || "  ";
    return JSON.stringify(value, null, step).replaceAll("\n", `\n${outer}`);
  }
}

const startOf = (span: JsonSpan) => span.keyFrom ?? span.from;
const slotOf = ({ from, end }: JsonSpan) => ({ from, end });

function rankOf(pointer: string, order: readonly string[]): number {
  const name = pointer
    .slice(pointer.lastIndexOf("/") + 1)
    .replaceAll("~1", "/")
    .replaceAll("~0", "~");
  return order.indexOf(name);
}

const tokenOf = (name: string) => name.replaceAll("~", "~0").replaceAll("/", "~1");

/** JSON on one line with a space inside braces, after colons and commas. */
export function onOneLine(value: unknown): string {
  if (Array.isArray(value)) return `[${value.map(onOneLine).join(", ")}]`;
  if (typeof value !== "object" || value === null) return JSON.stringify(value);
  const members = Object.entries(value).filter(([, inner]) => inner !== undefined);
  if (members.length === 0) return "{}";
  return `{ ${members.map(([name, inner]) => `${JSON.stringify(name)}: ${onOneLine(inner)}`).join(", ")} }`;
}
