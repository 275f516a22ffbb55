import { isFirmwareWithin } from "@/lib/domain/firmware-range";
import type { StepReason } from "@/lib/domain/semver-step";
import type { LayoutChecksum, LayoutDocument, LayoutField } from "@/schemas/documents/layout";

type Part = LayoutField | LayoutChecksum;
type Facts = Record<string, unknown>;
type Step = StepReason["step"];

/** Every difference between two layouts that asks for a version step, in words; the version itself is none. */
export function layoutChanges(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  return [
    ...headChanges(previous, next),
    ...firmwareChange(previous, next),
    ...partChanges("fields", previous, next),
    ...partChanges("checksums", previous, next),
  ];
}

/** What firmware for the older layout would do with the newer image. */
const misread = ({ version }: LayoutDocument) => `firmware that reads ${version.split(".")[0]}.x would misread it`;

const isSame = (a: unknown, b: unknown) => JSON.stringify(a) === JSON.stringify(b);

/** A value as a reader of the document knows it. */
function shown(value: unknown): string {
  if (value === undefined || value === null) return "none";
  if (typeof value === "string") return value;
  if (Array.isArray(value) && value.length === 2 && value.every((end) => typeof end === "number"))
    return `${value[0]} to ${value[1]}`;
  if (typeof value === "object" && "from" in value) return String(value.from);
  if (typeof value === "object" && "const" in value) return `the constant ${shown(value.const)}`;
  return JSON.stringify(value);
}

const HEAD_WORDS: Readonly<Record<string, string>> = {
  family: "the family",
  order: "the order of the compensation",
  bytes: "the memory's size",
  pageBytes: "the page size",
  baseAddress: "the base address",
  fill: "the fill",
  byteOrder: "the memory's byte order",
};

/** Members with rules of their own, or that ask for no step. */
const OWN_RULES = ["format", "version", "firmware", "description", "memory", "kept", "reserved", "fields", "checksums"];

function headChanges(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const kept: StepReason[] = isSame(keptBytes(previous), keptBytes(next))
    ? []
    : [
        {
          path: "/kept",
          step: "major",
          message: `what is kept is ${keptText(next)} instead of ${keptText(previous)}: ${misread(previous)}`,
        },
      ];
  const told = (["description", "reserved"] as const).flatMap((key): StepReason[] => {
    if (isSame((previous as unknown as Facts)[key], (next as unknown as Facts)[key])) return [];
    const message =
      key === "reserved" ? "what is reserved changed; its bytes stay fill" : "the description of the layout changed";
    return [{ path: `/${key}`, step: "patch", message }];
  });
  return [
    ...objectChanges("", omit(previous, OWN_RULES), omit(next, OWN_RULES), previous),
    ...objectChanges("/memory", { ...previous.memory }, { ...next.memory }, previous),
    ...kept,
    ...told,
  ];
}

function objectChanges(path: string, before: Facts, after: Facts, previous: LayoutDocument): StepReason[] {
  return Object.keys({ ...before, ...after })
    .filter((key) => !isSame(before[key], after[key]))
    .map((key) => ({
      path: `${path}/${key}`,
      step: "major",
      message: `${HEAD_WORDS[key] ?? `“${key}”`} is ${shown(after[key])} instead of ${shown(before[key])}: ${misread(previous)}`,
    }));
}

const omit = (object: object, names: readonly string[]): Facts =>
  Object.fromEntries(Object.entries(object).filter(([name]) => !names.includes(name)));

const keptText = ({ kept = [] }: LayoutDocument) =>
  kept.length === 0 ? "nothing" : kept.map((range) => shown(range)).join(" and ");

/** The kept offsets themselves, so that the same bytes written as other ranges count as equal. */
function keptBytes(layout: LayoutDocument): number[] {
  const offsets = new Set<number>();
  for (const [from, to] of layout.kept ?? []) for (let at = from; at <= to; at++) offsets.add(at);
  return [...offsets].sort((a, b) => a - b);
}

function firmwareChange(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const [from, to] = [previous.firmware, next.firmware];
  if (from === to) return [];
  const reason = (step: Step, tail: string): StepReason[] => [
    { path: "/firmware", step, message: `the firmware range is ${to} instead of ${from}${tail}` },
  ];
  if (!isFirmwareWithin(to, from)) return reason("major", ": it names versions that it did not name before");
  return isFirmwareWithin(from, to)
    ? reason("patch", ": other words for the same versions")
    : reason("minor", ": fewer versions");
}

function partChanges(list: "fields" | "checksums", previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const reasons: StepReason[] = [];
  const old: readonly Part[] = previous[list];
  const byName = new Map(old.map((part) => [part.name, part]));
  const matched = new Set<Part>();
  const unmatched: { part: Part; path: string }[] = [];
  next[list].forEach((part: Part, i) => {
    const path = `/${list}/${i}`;
    const same = byName.get(part.name);
    if (!same) unmatched.push({ part, path });
    else {
      matched.add(same);
      reasons.push(...compareParts(same, part, path, previous, next));
    }
  });
  // The bytes do not know names: the same thing at the same place under another name is a change of text.
  const byFacts = new Map(old.filter((one) => !matched.has(one)).map((one) => [factsText(one, previous), one]));
  for (const { part, path } of unmatched) {
    const renamed = byFacts.get(factsText(part, next));
    if (renamed) matched.add(renamed);
    reasons.push(renamed ? renaming(renamed, part, path) : addition(part, path));
  }
  old.forEach((part, i) => {
    if (matched.has(part)) return;
    const message = `“${part.name}” is gone from ${part.at}: ${misread(previous)}`;
    reasons.push({ path: `/${list}/${i}`, step: "major", message });
  });
  return reasons;
}

const renaming = (old: Part, part: Part, path: string): StepReason => ({
  path: `${path}/name`,
  step: "patch",
  message: `“${old.name}” is called “${part.name}”; its bytes are the same`,
});

const addition = (part: Part, path: string): StepReason => ({
  path,
  step: "minor",
  message: `“${part.name}” is new at ${part.at}, in space that was fill`,
});

function compareParts(
  old: Part,
  part: Part,
  path: string,
  previous: LayoutDocument,
  next: LayoutDocument,
): StepReason[] {
  const before = byteFacts(old, previous);
  const after = byteFacts(part, next);
  const reasons: StepReason[] = Object.keys({ ...before, ...after })
    .filter((key) => !isSame(before[key], after[key]))
    .map((key) => ({
      path: `${path}/${key}`,
      step: "major",
      message: `${changeText(part.name, key, before[key], after[key])}: ${misread(previous)}`,
    }));
  for (const key of TEXT_MEMBERS) {
    const [from, to] = [(old as unknown as Facts)[key], (part as unknown as Facts)[key]];
    if (isSame(from, to)) continue;
    const message =
      key === "description" || key === "enum"
        ? `the ${key === "enum" ? "names" : key} of “${part.name}” changed`
        : changeText(part.name, key, from, to);
    reasons.push({ path: `${path}/${key}`, step: "patch", message });
  }
  return reasons;
}

function changeText(name: string, key: string, from: unknown, to: unknown): string {
  if (key === "at") return `“${name}” moved from ${from} to ${to}`;
  return `${FACT_WORDS[key] ?? `“${key}”`} of “${name}” is ${shown(to)} instead of ${shown(from)}`;
}

const FACT_WORDS: Readonly<Record<string, string>> = {
  type: "the type",
  length: "the length",
  byteOrder: "the byte order",
  scale: "the scale",
  bias: "the bias",
  unit: "the unit",
  value: "the source",
  algorithm: "the algorithm",
  over: "the range",
  min: "the lower limit",
  max: "the upper limit",
};

/** Members that no byte follows from. */
const TEXT_MEMBERS = ["min", "max", "description", "enum"];

/** What counts where a member is left out. */
const DEFAULTS: Facts = { scale: 1, bias: 0, count: 1, signed: false, fraction: 0 };

/**
 * What firmware reads by: every member that is not a text for people, so that a member this code does not know counts. One
 * left out counts as its default, and one byte has no order.
 */
function byteFacts(part: Part, layout: LayoutDocument): Facts {
  const facts = omit(part, ["name", ...TEXT_MEMBERS]);
  for (const [name, value] of Object.entries(DEFAULTS)) if (isSame(facts[name], value)) delete facts[name];
  facts.byteOrder = isOneByte(part) ? undefined : (part.byteOrder ?? layout.memory.byteOrder);
  if ("value" in part) facts.value = valueFacts(part);
  return facts;
}

function factsText(part: Part, layout: LayoutDocument): string {
  return JSON.stringify(Object.entries(byteFacts(part, layout)).sort(([a], [b]) => (a < b ? -1 : 1)));
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
  return { const: constants.length === 1 ? constants[0] : constants };
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
