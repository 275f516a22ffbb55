"use client";

import Form from "next/form";
import { useEffect, useRef } from "react";

/** The large field for a serial. A wedge scanner types into it and sends Enter; a paste of one serial goes at once. */
export function SerialField({ asked }: { asked: string }) {
  const form = useRef<HTMLFormElement>(null);
  const input = useRef<HTMLInputElement>(null);
  useEffect(() => {
    // On a phone the keyboard would cover the page.
    if (window.matchMedia("(pointer: fine)").matches) input.current?.focus();
  }, []);
  return (
    <Form action="/trace" ref={form} className="flex flex-col gap-1.5">
      <label htmlFor="serial" className="text-md font-semibold">
        Serial
      </label>
      <div className="flex gap-2.5">
        <input
          ref={input}
          id="serial"
          name="q"
          defaultValue={asked}
          required
          maxLength={80}
          autoComplete="off"
          autoCapitalize="characters"
          spellCheck={false}
          enterKeyHint="search"
          placeholder="Scan, type or paste"
          onPaste={() => setTimeout(() => form.current?.requestSubmit(), 0)}
          className="h-14 min-w-0 flex-1 rounded border border-ink-faint bg-paper px-4 font-mono text-lg"
        />
        <button
          type="submit"
          className="h-14 rounded border border-copper bg-copper px-5 font-semibold text-on-copper hover:border-copper-strong hover:bg-copper-strong"
        >
          Look up
        </button>
      </div>
      <p className="text-xs text-ink-soft">
        A part of a serial, a lot, a family, a package such as LOT 1.2.0, its digest or its four words will do too.
      </p>
    </Form>
  );
}
