import type { LintOptions } from "@/builders/codec/lint/lint";
import { readLayout } from "@/builders/codec/lint/lint-shape";
import { type Extent, listExtents } from "@/builders/codec/memory-map";
import { JsonEditor, type TextEdit } from "@/lib/domain/json-edits";
import type { Problem } from "@/lib/errors";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";

/** One way to clear a finding. */
export interface Mend {
  /** What it does, for a button: “Move “zero” to 64”. */
  label: string;
  edits: TextEdit[];
}

/** A text and what can be read from it, for the functions that mend one finding each. */
export interface MendContext {
  editor: JsonEditor;
  /** What of the document can be judged. */
  layout: LayoutDocument;
  extents: readonly Extent[];
  options: LintOptions;
}

export type Mender = (problem: Problem, context: MendContext) => Mend | undefined;

/** @returns undefined for a text that is not JSON, or has no memory and fields to speak of. */
export function mendContextOf(text: string, options: LintOptions): MendContext | undefined {
  const { readable } = readLayout(parse(text));
  if (!readable) return undefined;
  const { layout, paths } = readable;
  return { editor: new JsonEditor(text), layout, extents: listExtents(layout, paths), options };
}

function parse(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return undefined; // nothing to mend in: the editor says where it stops being JSON
  }
}

/** `/fields/3` of `/fields/3/value/from`: the field, checksum or kept range that a finding is about. */
export function partOf(path: string): string {
  return /^\/(?:fields|checksums|kept|reserved)\/\d+/.exec(path)?.[0] ?? path;
}

/** The part of the document that a pointer names, as written. */
export function readPart<T>({ editor }: MendContext, pointer: string): T | undefined {
  const raw = editor.raw(pointer);
  return raw === undefined ? undefined : (JSON.parse(raw) as T);
}

/** The field that a finding is about. */
export function fieldOf(problem: Problem, context: MendContext): LayoutField | undefined {
  const part = partOf(problem.path);
  return part.startsWith("/fields/") ? readPart<LayoutField>(context, part) : undefined;
}

/** Order in which a field's members are written. */
export const FIELD_MEMBERS = ["name", "at", "type", "length", "byteOrder", "scale", "bias", "unit", "min", "max"];

/** A member's new value, or its removal, as edits. */
export function setMember(context: MendContext, path: string, name: string, value: unknown): TextEdit[] {
  return context.editor.set(path, name, value === undefined ? undefined : JSON.stringify(value), FIELD_MEMBERS);
}
