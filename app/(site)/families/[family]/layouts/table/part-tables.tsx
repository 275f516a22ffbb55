"use client";

import { type RefObject, useMemo } from "react";
import { Card } from "@/app/_components/card";
import type { EditorHandle } from "@/app/_components/editor/editor-handle";
import { mendContextOf } from "@/builders/codec/mend/mend-context";
import { findFreePlace } from "@/builders/codec/mend/mend-places";
import { JsonEditor } from "@/lib/domain/json-edits";
import type { Judged } from "../judge-text";
import { type Column, checksumColumns, fieldColumns } from "./columns";
import { PartTable } from "./part-table";

interface PartTablesProps {
  judged: Judged;
  handle: RefObject<EditorHandle | null>;
  readOnly: boolean;
  shown: string | undefined;
  onPoint: (path: string | undefined) => void;
}

type List = "fields" | "checksums";

/** Fields and checksums as tables that write into the same text. */
export function PartTables({ judged, handle, readOnly, shown, onPoint }: PartTablesProps) {
  const parts = useMemo(() => readParts(judged), [judged]);
  const columns = useMemo(
    () => ({ fields: fieldColumns(parts?.fields as never[]), checksums: checksumColumns() }),
    [parts?.fields],
  );
  const problems = useMemo(
    () => [
      ...judged.errors.map((problem) => ({ ...problem, stands: true })),
      ...judged.warnings.map((problem) => ({ ...problem, stands: false })),
    ],
    [judged],
  );
  if (!parts) {
    return (
      <Card title="Fields">
        <p className="text-sm text-ink-soft">
          The table follows as soon as the text is JSON with fields and checksums.
        </p>
      </Card>
    );
  }
  const table = (list: List, noun: string) => (
    <PartTable
      noun={noun}
      list={`/${list}`}
      parts={parts[list]}
      columns={columns[list]}
      problems={problems}
      readOnly={readOnly}
      shown={shown}
      onPoint={onPoint}
      {...deedsOn(list, handle)}
    />
  );
  return (
    <>
      <Card title="Fields" note="the same document as the text above">
        {table("fields", "field")}
        {readOnly ? null : (
          <p className="mt-2 text-xs text-ink-soft">
            Arrows go from cell to cell, Enter or typing writes, Escape leaves a cell as it was. Insert adds a row,
            Ctrl+Delete takes one out, Alt with up or down moves it, Ctrl+Z undoes. A constant begins with =.
          </p>
        )}
      </Card>
      <Card title="Checksums" note="computed in this order, after all fields">
        {table("checksums", "checksum")}
      </Card>
    </>
  );
}

type Loose = Record<string, unknown>;

/** The lists as they are written, even where a part of them is not readable as a layout yet. */
function readParts({ isJson, text }: Judged): Record<List, Loose[]> | null {
  const document: unknown = isJson ? JSON.parse(text) : null;
  if (typeof document !== "object" || document === null) return null;
  const { fields, checksums } = document as Loose;
  if (!Array.isArray(fields) || !Array.isArray(checksums)) return null;
  const objects = (list: unknown[]) =>
    list.map((part) => (typeof part === "object" && part !== null ? (part as Loose) : {}));
  return { fields: objects(fields), checksums: objects(checksums) };
}

/** Deeds of a table as edits of the text as it is at that moment. */
function deedsOn(list: List, handle: RefObject<EditorHandle | null>) {
  const editor = () => new JsonEditor(handle.current?.text() ?? "");
  return {
    onWrite: (index: number, { kind }: Column, entry: string) => {
      const now = editor();
      const path = `/${list}/${index}`;
      const part = parsed(now.raw(path));
      if (!part) return "The text is not JSON just now; mend it first.";
      const written = kind.write({ editor: now, path, part }, entry);
      if ("refusal" in written) return written.refusal;
      handle.current?.edit(written.edits);
      return undefined;
    },
    onAdd: (after: number) => {
      handle.current?.edit(editor().insert(`/${list}`, newPart(list, handle.current.text()), after + 1));
      return after + 1;
    },
    onRemove: (index: number) => handle.current?.edit(editor().remove(`/${list}/${index}`)),
    onMove: (from: number, to: number) => handle.current?.edit(editor().move(`/${list}`, from, to)),
    onUndo: () => handle.current?.undo(),
    onRedo: () => handle.current?.redo(),
  };
}

function parsed(raw: string | undefined): Loose | undefined {
  try {
    return raw === undefined ? undefined : (JSON.parse(raw) as Loose);
  } catch {
    return undefined; // half-written in the editor beside
  }
}

/** A part at the first free place: a byte of constant 0, or a check over all bytes before it. */
function newPart(list: List, text: string): Loose {
  const context = mendContextOf(text, {});
  const taken = new Set(
    [...(context?.layout.fields ?? []), ...(context?.layout.checksums ?? [])].map((part) => part.name),
  );
  const noun = list === "fields" ? "field" : "check";
  let number = 1;
  while (taken.has(`${noun}${number}`)) number += 1;
  const name = `${noun}${number}`;
  if (list === "fields") {
    return { name, at: (context && findFreePlace(context, { width: 1 })) ?? 0, type: "u8", value: { const: 0 } };
  }
  const bytes = context?.layout.memory.bytes ?? 64;
  const at = (context && findFreePlace(context, { width: 2, from: Math.max(0, bytes - 2) })) ?? 0;
  return { name, at, algorithm: "CRC-16/IBM-3740", over: [0, Math.max(0, at - 1)] };
}
