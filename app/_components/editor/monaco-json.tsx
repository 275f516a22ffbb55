"use client";

import dynamic from "next/dynamic";
import type { JsonEditorProps } from "@/app/_components/editor/json-editor";

const JsonEditor = dynamic(() => import("@/app/_components/editor/json-editor"), {
  ssr: false,
  loading: () => (
    <p className="p-4 text-sm text-ink-soft" role="status">
      The editor is loading.
    </p>
  ),
});

/** Editor of a JSON document, loaded in the browser only and served by the app itself. */
export function MonacoJson(props: JsonEditorProps) {
  return (
    <div style={{ height: props.height ?? 640 }}>
      <JsonEditor {...props} />
    </div>
  );
}
