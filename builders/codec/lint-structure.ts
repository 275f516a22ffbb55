import { findCrcParameters } from "@/builders/codec/crc";
import { lintField } from "@/builders/codec/lint-field";
import { type ReadableLayout, readLayout } from "@/builders/codec/lint-shape";
import { type Extent, listExtents } from "@/builders/codec/memory-map";
import type { Problem } from "@/lib/errors";

/**
 * Everything that stands against encoding a document without doubt: shape, fields one by one, places in memory and
 * checksums. {@link lintLayout} adds what depends on family, order and versions.
 */
export function listStructureProblems(document: unknown): Problem[] {
  const { readable, problems } = readLayout(document);
  if (!readable) return problems;
  return [
    ...problems,
    ...readable.layout.fields.flatMap((field, i) => lintField(field, readable.paths.fields[i] as string)),
    ...lintNames(readable),
    ...lintPlaces(readable),
    ...lintChecksums(readable),
  ];
}

/** Names stand once: values and differences are told apart by them. */
function lintNames({ layout, paths }: ReadableLayout): Problem[] {
  const seen = new Map<string, string>();
  const named = [
    ...layout.fields.map((field, i) => ({ name: field.name, path: paths.fields[i] as string })),
    ...layout.checksums.map((checksum, i) => ({ name: checksum.name, path: paths.checksums[i] as string })),
  ];
  return named.flatMap(({ name, path }) => {
    const first = seen.get(name);
    if (first === undefined) seen.set(name, path);
    return first === undefined ? [] : [problem(`${path}/name`, "field.duplicate_name", `“${name}” is used before`)];
  });
}

function lintPlaces({ layout, paths }: ReadableLayout): Problem[] {
  const problems: Problem[] = [];
  const { bytes, baseAddress } = layout.memory;
  if (baseAddress + bytes > 2 ** 32) {
    problems.push(
      problem("/memory/baseAddress", "memory.beyond_address_space", "the memory ends above address FFFFFFFF"),
    );
  }
  (layout.kept ?? []).forEach(([from, to], i) => {
    if (from > to)
      problems.push(problem(paths.kept[i] as string, "kept.range_invalid", "the range ends before it starts"));
  });
  // A sweep in rising order against the part that reaches furthest finds every part that lies on an earlier one.
  let furthest: Extent | undefined;
  for (const part of listExtents(layout, paths)) {
    if (part.end > bytes) {
      const message = `“${part.name}” ends at byte ${part.end - 1}, the memory at ${bytes - 1}`;
      problems.push(problem(part.path, `${part.kind}.outside_memory`, message));
    }
    if (furthest && part.at < furthest.end) problems.push(overlap(part, furthest));
    if (!furthest || part.end > furthest.end) furthest = part;
  }
  return problems;
}

function overlap(part: Extent, other: Extent): Problem {
  const [written, kept] = part.kind === "kept" ? [other, part] : [part, other];
  const shared = `bytes ${part.at} to ${Math.min(part.end, other.end) - 1}`;
  if (written.kind !== "kept" && kept.kind === "kept") {
    return problem(written.path, `${written.kind}.over_kept`, `“${written.name}” lies on a kept range, ${shared}`);
  }
  return problem(part.path, `${part.kind}.overlap`, `“${part.name}” and “${other.name}” share ${shared}`);
}

function lintChecksums({ layout, paths }: ReadableLayout): Problem[] {
  const parts = listExtents(layout, paths);
  const stored = new Map(parts.filter((part) => part.kind === "checksum").map((part) => [part.path, part]));
  const kept = parts.filter((part) => part.kind === "kept");
  return layout.checksums.flatMap((checksum, i) => {
    const path = paths.checksums[i] as string;
    const [from, to] = checksum.over;
    const covers = (part: Extent | undefined) => part !== undefined && part.at <= to && part.end > from;
    const found: Problem[] = [];
    const add = (tail: string, reason: string, message: string) =>
      found.push(problem(`${path}/${tail}`, `checksum.${reason}`, message));
    if (!findCrcParameters(checksum.algorithm)) {
      add("algorithm", "unknown_algorithm", `“${checksum.algorithm}” is not in the catalogue`);
    }
    if (from > to) add("over", "range_invalid", "the range ends before it starts");
    if (to >= layout.memory.bytes) add("over", "range_outside_memory", `the memory ends at ${layout.memory.bytes - 1}`);
    if (covers(stored.get(path))) add("over", "covers_itself", `“${checksum.name}” covers its own place`);
    if (kept.some(covers)) add("over", "over_kept", `“${checksum.name}” covers bytes that belong to the device`);
    layout.checksums.slice(i + 1).forEach((later, j) => {
      if (!covers(stored.get(paths.checksums[i + 1 + j] as string))) return;
      add("over", "covers_later", `“${checksum.name}” covers “${later.name}”, which is computed after it`);
    });
    return found;
  });
}

function problem(path: string, code: string, message: string): Problem {
  return { path, code, message };
}
