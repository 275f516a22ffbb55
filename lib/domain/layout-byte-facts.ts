import { canonicalJson } from "@/lib/domain/canonical-json";
import { algorithmText, hexText } from "@/lib/domain/checksum-text";
import type { LayoutChecksum, LayoutDocument, LayoutField } from "@/schemas/documents/layout";

export type Part = LayoutField | LayoutChecksum;
export type Facts = Record<string, unknown>;

/**
 * Whether two parts of documents say the same. The order of an object's members says nothing: the database keeps them in an
 * order of its own, an author's text has them in another.
 */
export function isSame(a: unknown, b: unknown): boolean {
  if (a === undefined || b === undefined) return a === b;
  return JSON.stringify(a) === JSON.stringify(b) || canonicalJson(a) === canonicalJson(b);
}

/** The members of an object but for some. */
export const omit = (object: object, names: readonly string[]): Facts =>
  Object.fromEntries(Object.entries(object).filter(([name]) => !names.includes(name)));

/** Members that no byte follows from. */
export const TEXT_MEMBERS = ["min", "max", "description", "enum"];

/** What counts where a member is left out. */
const DEFAULTS: Facts = { scale: 1, bias: 0, count: 1, signed: false, fraction: 0 };

/**
 * What firmware reads by: every member that is not a text for people, so that a member this code does not know counts. One
 * left out counts as its default, and one byte has no order.
 */
export function byteFacts(part: Part, layout: LayoutDocument): Facts {
  const facts = omit(part, ["name", ...TEXT_MEMBERS]);
  for (const [name, value] of Object.entries(DEFAULTS)) if (isSame(facts[name], value)) delete facts[name];
  facts.byteOrder = isOneByte(part) ? undefined : (part.byteOrder ?? layout.memory.byteOrder);
  if ("value" in part) facts.value = valueFacts(part);
  if ("algorithm" in part) Object.assign(facts, checksumFacts(part));
  return facts;
}

/** However they are written: hex digits in one way, a list of one range as the range, the algorithm in words. */
function checksumFacts({ algorithm, over, forbid, instead }: LayoutChecksum): Facts {
  const [first] = over;
  return {
    algorithm: algorithmText(algorithm),
    over: over.length === 1 && Array.isArray(first) ? first : over,
    forbid: forbid && [...new Set(forbid.map((hex) => hexText(hex)))].sort(),
    instead: instead === undefined ? undefined : hexText(instead),
  };
}

/** The memory without what is for people; no segments is an empty list of them. */
export function memoryFacts({ memory }: LayoutDocument): Facts {
  const { segments = [], ...rest } = memory;
  const places = segments.map(({ at, baseAddress }) => ({ at, baseAddress })).sort((a, b) => a.at - b.at);
  return { ...rest, segments: places };
}

export function factsText(part: Part, layout: LayoutDocument): string {
  return canonicalJson(byteFacts(part, layout));
}

/** Elements of one byte have no byte order. */
function isOneByte(part: Part): boolean {
  const { algorithm, type, bits, length } = part as unknown as Facts;
  if (typeof algorithm === "string") return algorithm.startsWith("CRC-8/");
  if (typeof algorithm === "object" && algorithm !== null) {
    const { width, sum, xor } = algorithm as Facts;
    return Number(width ?? sum ?? xor) <= 8;
  }
  if (type === "fixed") return bits === 8;
  return type === "bcd" ? length === 1 : ["u8", "i8", "ascii", "bytes"].includes(type as string);
}

/** Where the value comes from, constants as they are stored: hex digits in one case, names by their numbers. */
function valueFacts(field: LayoutField): unknown {
  const value = field.value as Facts;
  if (Array.isArray(value.bits)) return { bits: value.bits.map((part: LayoutField) => bitFacts(part)) };
  if (!("const" in value)) return value;
  const constants = [value.const].flat().map((one) => storedConstant(one, field));
  // A list of equal constants is the constant repeated.
  return { const: new Set(constants).size === 1 ? constants[0] : constants };
}

function bitFacts(part: LayoutField): Facts {
  const facts = omit(part, ["name", ...TEXT_MEMBERS]);
  for (const [name, value] of Object.entries(DEFAULTS)) if (isSame(facts[name], value)) delete facts[name];
  return { ...facts, value: valueFacts(part) };
}

function storedConstant(constant: unknown, field: LayoutField): unknown {
  if (typeof constant !== "string") return constant;
  const names = (field as unknown as { enum?: Record<string, number> }).enum ?? {};
  if (Object.hasOwn(names, constant)) return names[constant];
  return field.type === "bytes" ? constant.toUpperCase() : constant;
}
