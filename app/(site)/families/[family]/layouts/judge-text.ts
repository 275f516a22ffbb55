import type { JsonMarker } from "@/app/_components/editor/json-editor";
import { type LayoutMemory, memoryOfLayout } from "@/app/_components/memory-map-parts";
import { joinShape, type LintOptions, lintLayout } from "@/builders/codec/lint/lint";
import { listResolutions, type Resolution } from "@/builders/codec/lint/lint-resolution";
import { readLayout } from "@/builders/codec/lint/lint-shape";
import { type JsonSpan, jsonPositions, lineFinder, nearestSpan } from "@/lib/domain/json-positions";
import { layoutStep, newestLower, type Step, type StepReason } from "@/lib/domain/semver-step";
import type { Problem } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { shapeProblems } from "@/schemas/documents/layout-shape";

/** What the editor shows beside a text, but for the sample device. */
export interface Judged {
  /** The text it was judged from: mends and edits are made for exactly this one. */
  text: string;
  /** The text is JSON, whatever it says. */
  isJson: boolean;
  /** What of it can be read; null where there is no memory, fields or checksums to speak of. */
  layout: LayoutDocument | null;
  errors: Problem[];
  warnings: Problem[];
  step: Step | null;
  /** Newest published lower version, and the differences to it. */
  previous: string | null;
  reasons: StepReason[];
  memory: LayoutMemory | null;
  resolutions: Resolution[];
  markers: JsonMarker[];
  /** Where everything stands in the text, by JSON pointer. */
  spans: ReadonlyMap<string, JsonSpan>;
}

/** Judges a layout's text while it is written, in the browser and by the server's own code. */
export function judgeText(text: string, basis: LintOptions): Judged {
  const parsed = parse(text);
  const spans = jsonPositions(text);
  const nothing = { text, step: null, previous: null, reasons: [], memory: null, layout: null, resolutions: [], spans };
  if (parsed instanceof Error) {
    const message = `This is not JSON yet: ${parsed.message}`;
    const errors = [{ path: "", code: "layout.not_json", message }];
    return { ...nothing, isJson: false, errors, warnings: [], markers: [] };
  }
  const { errors, warnings, step } = joinShape(shapeProblems(parsed), lintLayout(parsed, basis));
  const found = { isJson: true, errors, warnings, step, markers: markersOf(text, spans, errors, warnings) };
  const { readable } = readLayout(parsed);
  if (!readable) return { ...nothing, ...found };
  const { layout, paths } = readable;
  const previous = step === null ? null : newestLower(basis.publishedVersions ?? [], layout.version);
  return {
    ...nothing,
    ...found,
    layout,
    previous: previous?.version ?? null,
    reasons: previous ? layoutStep(previous, layout).reasons : [],
    memory: memoryOfLayout(layout, paths),
    resolutions: listResolutions(layout, paths.fields, basis.family),
  };
}

function parse(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch (error) {
    return error;
  }
}

function markersOf(
  text: string,
  spans: ReadonlyMap<string, JsonSpan>,
  errors: readonly Problem[],
  warnings: readonly Problem[],
): JsonMarker[] {
  const lineOf = lineFinder(text);
  const mark = (severity: JsonMarker["severity"]) => (problem: Problem) => {
    const { from, end } = nearestSpan(spans, problem.path);
    const lineEnd = text.indexOf("\n", from);
    const stop = lineEnd < 0 ? end : Math.min(end, lineEnd);
    const start = lineOf(from);
    const last = lineOf(stop);
    return { severity, message: problem.message, ...start, endLine: last.line, endColumn: last.column };
  };
  return [...errors.map(mark("error")), ...warnings.map(mark("warning"))];
}

/** The field, checksum or kept range that an offset of the text lies in. */
export function partAt({ spans }: Pick<Judged, "spans">, offset: number): string | undefined {
  for (const [pointer, { from, end }] of spans) {
    if (from <= offset && offset < end && isPart(pointer)) return pointer;
  }
  return undefined;
}

const isPart = (pointer: string) => /^\/(?:fields|checksums|kept|reserved)\/\d+$/.test(pointer);
