import { isFirmwareWithin } from "@/lib/domain/firmware-range";
import type { StepReason } from "@/lib/domain/semver-step";
import type { LayoutChecksum, LayoutDocument, LayoutField } from "@/schemas/documents/layout";

type Part = LayoutField | LayoutChecksum;
type Facts = Record<string, unknown>;

/** Every difference between two layouts that asks for a version step; the version itself is none. */
export function layoutChanges(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  return [
    ...headChanges(previous, next),
    ...firmwareChange(previous, next),
    ...partChanges("fields", previous, next),
    ...partChanges("checksums", previous, next),
  ];
}

function headChanges(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const reasons: StepReason[] = [];
  const compare = (path: string, from: unknown, to: unknown, step: StepReason["step"], what: string) => {
    if (JSON.stringify(from) !== JSON.stringify(to)) reasons.push({ path, step, message: `${what} changed` });
  };
  compare("/family", previous.family, next.family, "major", "the family");
  compare("/order", previous.order, next.order, "major", "the order of the compensation");
  const words = { bytes: "the memory's size", pageBytes: "the page size", baseAddress: "the base address" };
  for (const [key, what] of Object.entries({ ...words, fill: "the fill", byteOrder: "the memory's byte order" })) {
    const name = key as keyof LayoutDocument["memory"];
    compare(`/memory/${name}`, previous.memory[name], next.memory[name], "major", what);
  }
  compare("/kept", keptBytes(previous), keptBytes(next), "major", "what is kept");
  compare("/description", previous.description, next.description, "patch", "the description");
  return reasons;
}

/** The kept offsets themselves, so that the same bytes written as other ranges count as equal. */
function keptBytes(layout: LayoutDocument): number[] {
  const offsets = new Set<number>();
  for (const [from, to] of layout.kept ?? []) for (let at = from; at <= to; at++) offsets.add(at);
  return [...offsets].sort((a, b) => a - b);
}

function firmwareChange(previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  if (previous.firmware === next.firmware) return [];
  const path = "/firmware";
  if (!isFirmwareWithin(next.firmware, previous.firmware)) {
    return [{ path, step: "major", message: "the firmware range names versions that it did not name before" }];
  }
  if (!isFirmwareWithin(previous.firmware, next.firmware)) {
    return [{ path, step: "minor", message: "the firmware range is narrower" }];
  }
  return [{ path, step: "patch", message: "the firmware range is written differently" }];
}

function partChanges(list: "fields" | "checksums", previous: LayoutDocument, next: LayoutDocument): StepReason[] {
  const reasons: StepReason[] = [];
  const old: readonly Part[] = previous[list];
  const matched = new Set<Part>();
  const unmatched: { part: Part; path: string }[] = [];
  next[list].forEach((part: Part, i) => {
    const path = `/${list}/${i}`;
    const same = old.find((one) => one.name === part.name);
    if (!same) unmatched.push({ part, path });
    else {
      matched.add(same);
      reasons.push(...compareParts(same, part, path, previous, next));
    }
  });
  for (const { part, path } of unmatched) {
    // The bytes do not know names: the same thing at the same place under another name is a change of text.
    const facts = JSON.stringify(byteFacts(part, next));
    const renamed = old.find((one) => !matched.has(one) && JSON.stringify(byteFacts(one, previous)) === facts);
    if (renamed) matched.add(renamed);
    const message = renamed ? `“${renamed.name}” is called “${part.name}”` : `“${part.name}” is new`;
    reasons.push({ path: renamed ? `${path}/name` : path, step: renamed ? "patch" : "minor", message });
  }
  old.forEach((part, i) => {
    if (!matched.has(part)) reasons.push({ path: `/${list}/${i}`, step: "major", message: `“${part.name}” is gone` });
  });
  return reasons;
}

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
    .filter((key) => JSON.stringify(before[key]) !== JSON.stringify(after[key]))
    .map((key) => ({ path: `${path}/${key}`, step: "major", message: `${FACT_WORDS[key]} of “${part.name}” changed` }));
  for (const key of ["min", "max", "description"]) {
    if ((old as unknown as Facts)[key] === (part as unknown as Facts)[key]) continue;
    reasons.push({ path: `${path}/${key}`, step: "patch", message: `${FACT_WORDS[key]} of “${part.name}” changed` });
  }
  return reasons;
}

const FACT_WORDS: Readonly<Record<string, string>> = {
  at: "the place",
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
  description: "the description",
};

/** What firmware reads by, with defaults filled in, so that an explicit default is no change. */
function byteFacts(part: Part, layout: LayoutDocument): Facts {
  if ("algorithm" in part) {
    const order = part.algorithm.startsWith("CRC-8/") ? null : (part.byteOrder ?? layout.memory.byteOrder);
    return { at: part.at, algorithm: part.algorithm, over: part.over, byteOrder: order };
  }
  const single = ["u8", "i8", "ascii", "bytes"].includes(part.type);
  return {
    at: part.at,
    type: part.type,
    length: part.length ?? null,
    byteOrder: single ? null : (part.byteOrder ?? layout.memory.byteOrder),
    scale: part.scale ?? 1,
    bias: part.bias ?? 0,
    unit: part.unit ?? null,
    value: valueFacts(part),
  };
}

function valueFacts(field: LayoutField): Facts {
  if ("from" in field.value) return { from: field.value.from };
  const constant = field.value.const;
  return { const: field.type === "bytes" && typeof constant === "string" ? constant.toUpperCase() : constant };
}
