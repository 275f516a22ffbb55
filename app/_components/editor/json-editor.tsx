"use client";

import { Editor, loader } from "@monaco-editor/react";
import * as core from "monaco-editor/editor";
import "monaco-editor/features/register.all";
import { jsonDefaults } from "monaco-editor/languages/features/json/register";
import { useEffect, useRef, useState } from "react";
import { type EditorHandle, handleOf, rangeOf, type TextSpan } from "@/app/_components/editor/editor-handle";
import { defineTokenTheme, themeName } from "@/app/_components/editor/token-theme";

/** Something wrong in the text; lines and columns count from 1. */
export interface JsonMarker {
  severity: "error" | "warning" | "info";
  message: string;
  line: number;
  column: number;
  endLine: number;
  endColumn: number;
}

export interface JsonEditorProps {
  /** Text to begin with; later texts come through the handle, so that undo knows them. */
  initialText: string;
  onChange?: (text: string) => void;
  /** The editor is there. */
  onReady?: (handle: EditorHandle) => void;
  /** The cursor or the pointer came to an offset of the text. */
  onPoint?: (offset: number | undefined) => void;
  /** A place that something beside the editor points at. */
  shown?: TextSpan;
  /** JSON Schema of the document: completion and hover texts. */
  schema?: object;
  readOnly?: boolean;
  markers?: readonly JsonMarker[];
  /** Name of the editor for those who don't see it. */
  label: string;
  height?: number | string;
}

window.MonacoEnvironment = {
  getWorker: (_id: string, label: string) =>
    label === "json"
      ? new Worker(new URL("./json.worker.ts", import.meta.url), { type: "module" })
      : new Worker(new URL("./editor.worker.ts", import.meta.url), { type: "module" }),
};
// Without this the loader would fetch the editor from another host.
loader.config({ monaco: core as never });

const severities = {
  error: core.MarkerSeverity.Error,
  warning: core.MarkerSeverity.Warning,
  info: core.MarkerSeverity.Info,
};

type CodeEditor = core.editor.IStandaloneCodeEditor;

export default function JsonEditor(props: JsonEditorProps) {
  const { initialText, onChange, onReady, onPoint, shown, schema, readOnly, markers, label } = props;
  const [editor, setEditor] = useState<CodeEditor>();
  // Listeners are put on once and call what is current.
  const point = useRef(onPoint);
  point.current = onPoint;

  useEffect(() => {
    jsonDefaults.setDiagnosticsOptions({
      validate: true,
      enableSchemaRequest: false,
      // The page's own markers judge shape and sense by the code that the server uses; these would say the shape twice.
      schemaValidation: "ignore",
      schemas: schema ? [{ uri: "trimwright:document", fileMatch: ["*"], schema }] : [],
    });
  }, [schema]);
  useTheme();

  useEffect(() => editor && tellPlaces(editor, (offset) => point.current?.(offset)), [editor]);
  useEffect(() => editor && showMarkers(editor.getModel(), markers ?? []), [editor, markers]);
  useEffect(() => (editor && shown ? light(editor, shown) : undefined), [editor, shown]);

  return (
    <Editor
      language="json"
      defaultValue={initialText}
      theme={themeName}
      beforeMount={() => void defineTokenTheme()}
      onMount={(mounted) => {
        const code = mounted as unknown as CodeEditor;
        setEditor(code);
        onReady?.(handleOf(code));
      }}
      onChange={(next) => onChange?.(next ?? "")}
      options={{
        ariaLabel: label,
        readOnly,
        // Text that arrives many characters at once (input methods, dictation) makes the editor look behind tokens it has not
        // made yet, which it reports as an error of its own.
        autoClosingBrackets: "never",
        autoClosingQuotes: "never",
        autoSurround: "never",
        automaticLayout: true,
        fontFamily: getComputedStyle(document.documentElement).getPropertyValue("--font-figures"),
        fontSize: 14,
        lineHeight: 22,
        minimap: { enabled: false },
        scrollBeyondLastLine: false,
        tabSize: 2,
        renderLineHighlight: "line",
        overviewRulerLanes: 0,
        tabFocusMode: false,
        stickyScroll: { enabled: false },
        wordWrap: "off",
        fixedOverflowWidgets: true,
      }}
    />
  );
}

/** Colours follow the page's tokens, light and dark. */
function useTheme(): void {
  useEffect(() => {
    const apply = () => core.editor.setTheme(defineTokenTheme());
    const scheme = window.matchMedia("(prefers-color-scheme: dark)");
    const chosen = new MutationObserver(apply);
    chosen.observe(document.documentElement, { attributeFilter: ["data-theme"] });
    scheme.addEventListener("change", apply);
    return () => {
      chosen.disconnect();
      scheme.removeEventListener("change", apply);
    };
  }, []);
}

function tellPlaces(editor: CodeEditor, tell: (offset: number | undefined) => void): () => void {
  const offsetOf = (position: core.IPosition | null | undefined) =>
    position ? editor.getModel()?.getOffsetAt(position) : undefined;
  const listeners = [
    editor.onDidChangeCursorPosition(({ position }) => tell(offsetOf(position))),
    editor.onMouseMove(({ target }) => tell(offsetOf(target.position ?? editor.getPosition()))),
    editor.onMouseLeave(() => tell(offsetOf(editor.getPosition()))),
  ];
  return () => {
    for (const listener of listeners) listener.dispose();
  };
}

/** Tints a place of the text until it is told otherwise. */
function light(editor: CodeEditor, span: TextSpan): (() => void) | undefined {
  const model = editor.getModel();
  if (!model) return undefined;
  const range = rangeOf(model, span);
  const marks = editor.createDecorationsCollection([{ range, options: { className: "pointed-at" } }]);
  return () => marks.clear();
}

function showMarkers(model: core.editor.ITextModel | null, markers: readonly JsonMarker[]): void {
  if (!model) return;
  core.editor.setModelMarkers(
    model,
    "trimwright",
    markers.map((marker) => ({
      severity: severities[marker.severity],
      message: marker.message,
      startLineNumber: marker.line,
      startColumn: marker.column,
      endLineNumber: marker.endLine,
      endColumn: marker.endColumn,
    })),
  );
}
