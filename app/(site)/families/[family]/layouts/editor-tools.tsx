"use client";

import { Download, Printer, Redo2, Undo2, Upload } from "lucide-react";
import { useId, useState } from "react";
import { Button, buttonClass, LinkButton } from "@/app/_components/button";
import { FieldError } from "@/app/_components/form/field";
import { setOut } from "@/lib/domain/json-set-out";
import { LAYOUT_MAX_BYTES } from "@/schemas/api/layouts";
import { readImport } from "./draft/read-import";

interface EditorToolsProps {
  writable: boolean;
  /** Address of the sheet for the firmware's authors; absent for a layout that is not stored yet. */
  sheet: string | undefined;
  fileName: string;
  text: () => string;
  onUndo: () => void;
  onRedo: () => void;
  onImport: (text: string, name: string) => void;
}

/** What is done with the text as a whole. */
export function EditorTools({ writable, sheet, fileName, text, onUndo, onRedo, onImport }: EditorToolsProps) {
  const [refusal, setRefusal] = useState<string>();
  const take = async (file: File | undefined) => {
    if (!file) return;
    const read = readImport(new Uint8Array(await file.slice(0, LAYOUT_MAX_BYTES + 1).arrayBuffer()));
    setRefusal("refusal" in read ? `${file.name}: ${read.refusal}` : undefined);
    if ("text" in read) onImport(setOut(read.text), file.name);
  };
  return (
    <div>
      <div className="flex flex-wrap items-center gap-2">
        {writable ? (
          <>
            <Button onClick={onUndo}>
              <Undo2 size={16} aria-hidden />
              Undo
            </Button>
            <Button onClick={onRedo}>
              <Redo2 size={16} aria-hidden />
              Redo
            </Button>
            <ImportButton onFile={take} />
          </>
        ) : null}
        <Button onClick={() => save(text(), fileName)}>
          <Download size={16} aria-hidden />
          Export .json
        </Button>
        {sheet ? (
          <LinkButton href={sheet}>
            <Printer size={16} aria-hidden />
            Memory-map sheet
          </LinkButton>
        ) : null}
      </div>
      {refusal ? <FieldError>{refusal}</FieldError> : null}
    </div>
  );
}

function ImportButton({ onFile }: { onFile: (file: File | undefined) => void }) {
  const id = useId();
  return (
    <label
      htmlFor={id}
      className={`${buttonClass("quiet")} has-focus-visible:outline-2 has-focus-visible:outline-copper`}
    >
      <Upload size={16} aria-hidden />
      Import .json
      <input
        id={id}
        type="file"
        accept=".json,application/json"
        className="sr-only"
        onChange={(event) => {
          onFile(event.currentTarget.files?.[0]);
          // The same file can be taken again after it was changed.
          event.currentTarget.value = "";
        }}
      />
    </label>
  );
}

function save(text: string, name: string): void {
  const link = document.createElement("a");
  link.href = URL.createObjectURL(new Blob([text], { type: "application/json" }));
  link.download = name;
  link.click();
  setTimeout(() => URL.revokeObjectURL(link.href), 10_000);
}
