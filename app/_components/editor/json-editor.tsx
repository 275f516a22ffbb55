"use client";

import { Editor, loader, type OnMount } from "@monaco-editor/react";
import * as core from "monaco-editor/editor";
import "monaco-editor/features/register.all";
import { jsonDefaults } from "monaco-editor/languages/features/json/register";
import { useEffect, useRef } from "react";
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
  value: string;
  onChange?: (value: string) => void;
  /** JSON Schema of the document: completion, hover and squiggles. */
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

export default function JsonEditor({ value, onChange, schema, readOnly, markers, label }: JsonEditorProps) {
  const editor = useRef<Parameters<OnMount>[0]>(null);

  useEffect(() => {
    jsonDefaults.setDiagnosticsOptions({
      validate: true,
      enableSchemaRequest: false,
      schemas: schema ? [{ uri: "trimwright:document", fileMatch: ["*"], schema }] : [],
    });
  }, [schema]);

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

  useEffect(() => showMarkers(editor.current?.getModel() as core.editor.ITextModel | null, markers ?? []), [markers]);

  return (
    <Editor
      language="json"
      value={value}
      theme={themeName}
      beforeMount={() => void defineTokenTheme()}
      onMount={(mounted) => {
        editor.current = mounted;
        showMarkers(mounted.getModel() as unknown as core.editor.ITextModel | null, markers ?? []);
      }}
      onChange={(next) => onChange?.(next ?? "")}
      options={{
        ariaLabel: label,
        readOnly,
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
      }}
    />
  );
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
