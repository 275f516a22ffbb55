import { CRC_CATALOGUE } from "@/builders/codec/crc";
import { SOURCE_NAMES } from "@/builders/codec/sources";
import type { LayoutField } from "@/schemas/documents/layout";
import layoutSchema from "@/schemas/documents/layout.schema.json";
import {
  algorithmMember,
  type CellKind,
  numberMember,
  rangesMember,
  textMember,
  truthMember,
  valueMember,
} from "./write-member";

export interface Column {
  name: string;
  header: string;
  /** The schema's own description. */
  hint: string;
  kind: CellKind;
  /** Figures, set to the right. */
  figures: boolean;
  /** The only values there are. */
  choices?: readonly string[];
  /** Values to pick from while typing. */
  suggestions?: readonly string[];
}

interface Property {
  title?: string;
  description?: string;
  type?: string | string[];
  enum?: readonly unknown[];
  $ref?: string;
}

const definitions = layoutSchema.$defs as unknown as Record<
  string,
  Property & { properties?: Record<string, Property> }
>;

/** What the schema says of a member, references followed. */
function propertyOf(part: "field" | "checksum", name: string): Property {
  const own: Property = definitions[part]?.properties?.[name] ?? {};
  const referred = own.$ref ? definitions[own.$ref.replace("#/$defs/", "")] : undefined;
  return { ...referred, ...own };
}

const required = ["name", "at", "type"];

function column(part: "field" | "checksum", name: string, change: Partial<Column> = {}): Column {
  const { title = name, description = "", type, enum: values } = propertyOf(part, name);
  const number = type === "integer" || type === "number";
  const kind = number
    ? numberMember(name, required.includes(name))
    : type === "boolean"
      ? truthMember(name)
      : textMember(name, required.includes(name));
  const choices = type === "boolean" ? ["", "yes", "no"] : values?.map(String);
  const optional = choices && !required.includes(name) && !choices.includes("") ? ["", ...choices] : choices;
  return {
    name,
    header: title,
    hint: description,
    kind,
    figures: number,
    ...(optional && { choices: optional }),
    ...change,
  };
}

/** Members that only some types have: shown where a field has them or is of such a type. */
const SPECIAL: Readonly<Record<string, readonly string[]>> = {
  count: [],
  bits: ["fixed"],
  fraction: ["fixed"],
  signed: ["fixed"],
};

/** Columns of the field table: what every field has, and what these fields have besides. */
export function fieldColumns(fields: readonly LayoutField[] = []): Column[] {
  const used = new Set(fields.flatMap((field) => [...Object.keys(field), ...typeMembers(field.type)]));
  const special = Object.keys(SPECIAL).filter((name) => used.has(name) && propertyOf("field", name).type !== undefined);
  return [
    column("field", "name"),
    column("field", "at"),
    column("field", "type"),
    column("field", "length", { header: "Length" }),
    ...special.map((name) => column("field", name)),
    column("field", "value", { kind: valueMember, suggestions: SOURCE_NAMES }),
    column("field", "scale"),
    column("field", "bias"),
    column("field", "unit"),
    column("field", "min"),
    column("field", "max"),
    column("field", "byteOrder"),
  ];
}

const typeMembers = (type: string) =>
  Object.entries(SPECIAL).flatMap(([name, types]) => (types.includes(type) ? [name] : []));

/** Columns of the checksum table; a checksum by its parameters is changed in the text. */
export function checksumColumns(): Column[] {
  return [
    column("checksum", "name"),
    column("checksum", "at", { figures: true, kind: numberMember("at", true) }),
    column("checksum", "algorithm", { kind: algorithmMember, suggestions: Object.keys(CRC_CATALOGUE) }),
    column("checksum", "over", { kind: rangesMember }),
    column("checksum", "byteOrder"),
  ];
}
