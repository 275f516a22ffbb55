import { isFirmwareWithin, isRangeText } from "@/lib/domain/firmware-range";
import {
  byteFacts,
  type Facts,
  factsText,
  isSame,
  memoryFacts,
  omit,
  type Part,
  TEXT_MEMBERS,
} from "@/lib/domain/layout-byte-facts";
import type { StepReason } from "@/lib/domain/semver-step";
import type { LayoutDocument } from "@/schemas/documents/layout";

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
  segments: "where segments lie",
};

/** Members with rules of their own, or that ask for no step. */
const OWN_RULES = ["format", "version", "firmware", "description", "memory", "kept", "reserved", "fields", "checksums"];

function headChanges(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const kept: StepReason[] = isSame(offsetsOf(previous.kept), offsetsOf(next.kept))
    ? []
    : [
        {
          path: "/kept",
          step: "major",
          message: `what is kept is ${keptText(next)} instead of ${keptText(previous)}: ${misread(previous)}`,
        },
      ];
  const told: StepReason[] = [];
  if (!isSame(previous.description, next.description))
    told.push({ path: "/description", step: "patch", message: "the description of the layout changed" });
  if (!isSame(offsetsOf(previous.reserved), offsetsOf(next.reserved)))
    told.push({ path: "/reserved", step: "patch", message: "what is reserved changed; its bytes stay fill" });
  return [
    ...objectChanges("", omit(previous, OWN_RULES), omit(next, OWN_RULES), previous),
    ...objectChanges("/memory", memoryFacts(previous), memoryFacts(next), previous),
    ...kept,
    ...told,
    ...segmentNames(previous, next),
  ];
}

/** Names of segments are for people. */
function segmentNames(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const namesOf = ({ memory }: LayoutDocument) => memory.segments?.map(({ name }) => name ?? null);
  const [before, after] = [namesOf(previous), namesOf(next)];
  if (before?.length !== after?.length || isSame(before, after)) return [];
  return [{ path: "/memory/segments", step: "patch", message: "the names of segments changed" }];
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

const keptText = ({ kept = [] }: LayoutDocument) =>
  kept.length === 0 ? "nothing" : kept.map((range) => shown(range)).join(" and ");

/** The offsets themselves, so that the same bytes written as other ranges count as equal. */
function offsetsOf(ranges: LayoutDocument["kept"]): number[] {
  const offsets = new Set<number>();
  for (const [from, to] of ranges ?? []) for (let at = from; at <= to; at++) offsets.add(at);
  return [...offsets].sort((a, b) => a - b);
}

function firmwareChange(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const [from, to] = [previous.firmware, next.firmware];
  if (from === to) return [];
  const reason = (step: Step, tail: string): StepReason[] => [
    { path: "/firmware", step, message: `the firmware range is ${to} instead of ${from}${tail}` },
  ];
  // Half-typed: what it will name is not known yet.
  if (!isRangeText(from) || !isRangeText(to)) return reason("major", ": that is no range of versions");
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
  forbid: "what is forbidden",
  instead: "what is stored instead of a forbidden value",
  min: "the lower limit",
  max: "the upper limit",
};
