import type { JsonMarker } from "@/app/_components/editor/json-editor";
import { type LayoutMemory, memoryOfLayout } from "@/app/_components/memory-map-parts";
import { compileLayout } from "@/builders/codec/compile-layout";
import { findNumberType } from "@/builders/codec/field-types";
import { toHex } from "@/builders/codec/hex-text";
import { decodeImage, encodeImage } from "@/builders/codec/image";
import { type LintOptions, lintLayout } from "@/builders/codec/lint";
import { readLayout } from "@/builders/codec/lint-shape";
import { sampleSources } from "@/builders/codec/sample";
import { jsonPositions, lineFinder, nearestSpan } from "@/lib/domain/json-positions";
import { layoutStep, newestLower, type Step, type StepReason } from "@/lib/domain/semver-step";
import { AppError, type Problem } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";

/** One field of the sample device, as its value, as stored and as read back. */
export interface SampleRow {
  name: string;
  value: number | string | null;
  unit: string | null;
  /** Stored bytes, lower-case hex. */
  raw: string;
  readBack: number | string | null;
  /** Value less what is read back, in steps of the stored integer; null for what has no steps. */
  roundingSteps: number | null;
}

export interface Sample {
  serial: string;
  hex: string;
  rows: SampleRow[];
}

/** Everything that the editor shows beside a text. */
export interface Judged {
  errors: Problem[];
  warnings: Problem[];
  step: Step | null;
  /** Differences to the newest published lower version. */
  previous: string | null;
  reasons: StepReason[];
  memory: LayoutMemory | null;
  sample: Sample | null;
  markers: JsonMarker[];
}

/** Judges a layout's text while it is written: rules, memory map and a sample device, all in the browser. */
export function judgeText(text: string, basis: LintOptions): Judged {
  const document = parse(text);
  if (document instanceof Error) {
    const error = { path: "", code: "layout.not_json", message: `This is not JSON yet: ${document.message}` };
    return {
      errors: [error],
      warnings: [],
      step: null,
      previous: null,
      reasons: [],
      memory: null,
      sample: null,
      markers: [],
    };
  }
  const { errors, warnings, step } = lintLayout(document, basis);
  const layout = readLayout(document).readable?.layout;
  const previous = layout && step !== null ? newestLower(basis.publishedVersions ?? [], layout.version) : null;
  return {
    errors,
    warnings,
    step,
    previous: previous?.version ?? null,
    reasons: layout && previous ? layoutStep(previous, layout).reasons : [],
    memory: layout ? memoryOfLayout(layout) : null,
    sample: layout ? encodeSample(layout, basis) : null,
    markers: markersOf(text, errors, warnings),
  };
}

function parse(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch (error) {
    return error;
  }
}

/** An invented device as this layout stores it; null while the layout can't be encoded. */
function encodeSample(layout: LayoutDocument, { family }: LintOptions): Sample | null {
  try {
    const compiled = compileLayout(layout);
    const sources = sampleSources(layout, family);
    const image = encodeImage(compiled, sources);
    const decoded = decodeImage(compiled, image);
    const rows = compiled.fields.map((field, i): SampleRow => {
      const value = field.read(sources) ?? null;
      const { raw = "", value: readBack = null } = decoded[i] ?? {};
      const steps =
        typeof value === "number" && typeof readBack === "number" && findNumberType(field.type)?.kind === "integer";
      const roundingSteps = steps ? ((value as number) - (readBack as number)) / field.scale : null;
      return { name: field.name, value: shownAs(field.type, value), unit: field.unit, raw, readBack, roundingSteps };
    });
    return { serial: sources.device.serial, hex: toHex(image), rows };
  } catch (error) {
    // What stands against encoding is in the list of errors already.
    if (error instanceof AppError) return null;
    throw error;
  }
}

/** Constant bytes may be written in capitals; what is read back is not. */
function shownAs(type: string, value: number | string | null): number | string | null {
  return type === "bytes" && typeof value === "string" ? value.toLowerCase() : value;
}

function markersOf(text: string, errors: readonly Problem[], warnings: readonly Problem[]): JsonMarker[] {
  const spans = jsonPositions(text);
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
