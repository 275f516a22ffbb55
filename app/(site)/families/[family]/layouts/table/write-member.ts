import { SOURCE_NAMES } from "@/builders/codec/sources";
import { algorithmText } from "@/lib/domain/checksum-text";
import { type JsonEditor, onOneLine, type TextEdit } from "@/lib/domain/json-edits";
import type { ChecksumAlgorithm, SourceName } from "@/schemas/documents/layout";

/** Edits of the text, or in words why a cell's entry can't be taken. */
export type Written = { edits: TextEdit[] } | { refusal: string };

type Loose = Record<string, unknown>;

/** One member of a field or checksum as a cell shows and writes it. */
export interface CellKind {
  /** What the cell says; null where the table can't show it, and only the text can change it. */
  read(part: Loose): string | null;
  /** What stands there instead, in short. */
  tell?(part: Loose): string;
  /** @param entry as typed, trimmed. */
  write(place: CellPlace, entry: string): Written;
}

export interface CellPlace {
  editor: JsonEditor;
  /** JSON pointer of the field or checksum. */
  path: string;
  part: Loose;
}

/** Order in which members are written, where they are put in. */
const ORDER = [
  "name",
  "at",
  "type",
  "length",
  "count",
  "bits",
  "fraction",
  "signed",
  "algorithm",
  "byteOrder",
  "scale",
  "bias",
  "unit",
  "min",
  "max",
  "enum",
  "over",
];

const set = ({ editor, path }: CellPlace, name: string, raw: string | undefined): Written => ({
  edits: editor.set(path, name, raw, ORDER),
});

/** A number as typed: JSON's own writing is kept, a true minus sign and a leading + are understood. */
export function numberText(entry: string): string | undefined {
  const text = entry.replace("−", "-").replace(/^\+/, "");
  if (/^-?(0|[1-9]\d*)(\.\d+)?([eE][+-]?\d+)?$/.test(text)) return text;
  const number = Number(text);
  return text !== "" && Number.isFinite(number) ? String(number) : undefined;
}

export function numberMember(name: string, required = false): CellKind {
  return {
    read: (part) => shown(part[name]),
    write: (place, entry) => {
      if (entry === "") return required ? { refusal: `“${name}” can't be empty.` } : set(place, name, undefined);
      const raw = numberText(entry);
      return raw === undefined ? { refusal: `“${entry}” is not a number.` } : set(place, name, raw);
    },
  };
}

export function textMember(name: string, required = false): CellKind {
  return {
    read: (part) => shown(part[name]),
    write: (place, entry) => {
      if (entry === "" && required) return { refusal: `“${name}” can't be empty.` };
      return set(place, name, entry === "" ? undefined : JSON.stringify(entry));
    },
  };
}

export function truthMember(name: string): CellKind {
  return {
    read: (part) => (part[name] === true ? "yes" : part[name] === false ? "no" : ""),
    write: (place, entry) => {
      if (entry === "") return set(place, name, undefined);
      return entry === "yes" || entry === "no"
        ? set(place, name, String(entry === "yes"))
        : { refusal: "Write yes or no." };
    },
  };
}

function shown(value: unknown): string | null {
  if (value === undefined) return "";
  return typeof value === "string" || typeof value === "number" ? String(value) : null;
}

/** Where a value comes from: a source by name, or a constant behind an equals sign. */
export const valueMember: CellKind = {
  read: ({ value }) => {
    if (typeof value !== "object" || value === null) return "";
    if ("from" in value) return String(value.from);
    return "const" in value && !Array.isArray(value.const) ? `= ${value.const}` : null;
  },
  tell: ({ value }) => {
    const { bits, const: list } = (value ?? {}) as { bits?: unknown; const?: unknown };
    if (Array.isArray(list)) return `= ${list.join(", ").replaceAll("-", "−")}`;
    return Array.isArray(bits)
      ? `bits: ${bits.map((part: Loose | null) => String(part?.name ?? "…")).join(", ")}`
      : "…";
  },
  write: (place, entry) => {
    if (entry.startsWith("=")) return writeConstant(place, entry.slice(1).trim());
    if (!SOURCE_NAMES.includes(entry as SourceName))
      return { refusal: `“${entry}” is no source; a constant begins with =.` };
    return writeValue(place, "from", JSON.stringify(entry));
  },
};

/** The algorithm of a checksum: a name, or an object, which is told in words. */
export const algorithmMember: CellKind = {
  ...textMember("algorithm", true),
  tell: ({ algorithm }) =>
    typeof algorithm === "object" && algorithm !== null ? algorithmText(algorithm as ChecksumAlgorithm) : "…",
};

function writeConstant(place: CellPlace, entry: string): Written {
  const isText = ["ascii", "bytes", "u64", "i64"].includes(String(place.part.type)) || "enum" in place.part;
  const raw = isText ? JSON.stringify(entry) : (numberText(entry) ?? JSON.stringify(entry));
  return writeValue(place, "const", raw);
}

function writeValue(place: CellPlace, name: "from" | "const", raw: string): Written {
  const inner = `${place.path}/value`;
  if (place.editor.raw(`${inner}/${name}`) !== undefined) return { edits: place.editor.set(inner, name, raw) };
  return set(place, "value", onOneLine({ [name]: JSON.parse(raw) }));
}

/** Ranges of a checksum, as 0–39 or 0–39, 52–71. */
export const rangesMember: CellKind = {
  read: ({ over }) => {
    const ranges = Array.isArray(over) ? (typeof over[0] === "number" ? [over] : over) : [];
    return ranges.map((range: unknown) => (Array.isArray(range) ? range.join("–") : "?")).join(", ");
  },
  write: (place, entry) => {
    const ranges = entry.split(",").map((one) => /^\s*(\d+)\s*(?:-|–|to)\s*(\d+)\s*$/.exec(one));
    if (ranges.some((range) => range === null)) return { refusal: "Write first and last offset, as 0-125." };
    const numbers = ranges.map((range) => [Number(range?.[1]), Number(range?.[2])]);
    return set(place, "over", onOneLine(numbers.length === 1 ? numbers[0] : numbers));
  },
};
