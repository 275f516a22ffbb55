import { lintChecksums } from "@/builders/codec/lint/lint-checksums";
import { lintField } from "@/builders/codec/lint/lint-field";
import { lintSegments } from "@/builders/codec/lint/lint-segments";
import { type ReadableLayout, readLayout } from "@/builders/codec/lint/lint-shape";
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
    ...lintSegments(readable),
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
  const { bytes } = layout.memory;
  for (const kind of ["kept", "reserved"] as const) {
    (layout[kind] ?? []).forEach(([from, to], i) => {
      if (from <= to) return;
      problems.push(problem(paths[kind][i] as string, `${kind}.range_invalid`, "the range ends before it starts"));
    });
  }
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

/** Whether a part is one that bytes are written by. */
const isWritten = ({ kind }: Extent) => kind === "field" || kind === "checksum";

function overlap(part: Extent, other: Extent): Problem {
  const [written, range] = isWritten(part) ? [part, other] : [other, part];
  const shared = `bytes ${part.at} to ${Math.min(part.end, other.end) - 1}`;
  if (isWritten(written) && !isWritten(range)) {
    const message = `“${written.name}” lies on a ${range.kind} range, ${shared}`;
    return problem(written.path, `${written.kind}.over_${range.kind}`, message);
  }
  return problem(part.path, `${part.kind}.overlap`, `“${part.name}” and “${other.name}” share ${shared}`);
}

function problem(path: string, code: string, message: string): Problem {
  return { path, code, message };
}
