"use client";

import { Upload } from "lucide-react";
import { type DragEvent, useId, useRef, useState } from "react";
import { buttonClass } from "@/app/_components/button";
import { FieldError } from "@/app/_components/form/field";
import { formatSize } from "@/lib/domain/format/size";

export interface FileDropProps {
  label: string;
  /** Kinds of file, as `.csv,.xlsx`. */
  accept: string;
  help?: string;
  maxBytes?: number;
  error?: string;
  /** Name of the form field, where the file goes with a plain form. */
  name?: string;
  onFile?: (file: File) => void;
}

/** Takes one file, dropped or chosen, and shows which. */
export function FileDrop({ label, accept, help, maxBytes, error, name, onFile }: FileDropProps) {
  const id = useId();
  const input = useRef<HTMLInputElement>(null);
  const [file, setFile] = useState<File>();
  const [over, setOver] = useState(false);
  const tooLarge = file && maxBytes !== undefined && file.size > maxBytes;
  const shownError = tooLarge
    ? `${formatSize(file.size)} is more than the ${formatSize(maxBytes)} taken here. Split the file.`
    : error;

  const take = (next: File | undefined) => {
    if (!next) return;
    setFile(next);
    if (maxBytes === undefined || next.size <= maxBytes) onFile?.(next);
  };
  const drop = (event: DragEvent) => {
    event.preventDefault();
    setOver(false);
    if (input.current && event.dataTransfer.files.length) input.current.files = event.dataTransfer.files;
    take(event.dataTransfer.files[0]);
  };

  return (
    <div>
      {/* biome-ignore lint/a11y/noStaticElementInteractions: dropping is an extra; the input inside does the same */}
      <div
        onDragOver={(event) => {
          event.preventDefault();
          setOver(true);
        }}
        onDragLeave={() => setOver(false)}
        onDrop={drop}
        className={`flex flex-wrap items-center gap-x-4 gap-y-2 rounded border border-dashed px-4 py-4 ${
          shownError ? "border-oxide" : over ? "border-copper bg-tint" : "border-ink-faint bg-paper"
        }`}
      >
        <label htmlFor={id} className={`${buttonClass("outline")} has-focus-visible:outline-2`}>
          <Upload size={16} aria-hidden />
          {label}
          <input
            ref={input}
            id={id}
            type="file"
            name={name}
            accept={accept}
            aria-describedby={`${id}-help`}
            onChange={(event) => take(event.currentTarget.files?.[0])}
            className="sr-only"
          />
        </label>
        <span className="min-w-0 text-sm text-ink-soft" role="status">
          {file ? (
            <>
              <span className="font-mono wrap-anywhere text-ink">{file.name}</span> · {formatSize(file.size)}
            </>
          ) : (
            `or drop it here (${accept.replaceAll(",", ", ")})`
          )}
        </span>
      </div>
      {shownError ? <FieldError>{shownError}</FieldError> : null}
      <p id={`${id}-help`} className="mt-1 text-xs text-ink-soft">
        {help}
      </p>
    </div>
  );
}
