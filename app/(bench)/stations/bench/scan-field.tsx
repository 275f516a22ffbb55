"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useEffect, useRef, useTransition } from "react";

/** How often the bench asks by itself whether something else went live. */
const refreshMs = 20_000;

export interface ScanFieldProps {
  lot: string;
  chosen: string;
  /** Changes with every answer, so that the field is empty and focused again. */
  answered: string;
}

/** Where the scanner types. It has the focus whenever nothing else needs it; Enter asks. */
export function ScanField({ lot, chosen, answered }: ScanFieldProps) {
  const router = useRouter();
  const input = useRef<HTMLInputElement>(null);
  const [pending, startTransition] = useTransition();

  // biome-ignore lint/correctness/useExhaustiveDependencies: a new answer empties the field
  useEffect(() => {
    if (!input.current) return;
    input.current.value = "";
    input.current.focus();
  }, [answered]);

  useEffect(() => {
    const timer = setInterval(() => document.visibilityState === "visible" && router.refresh(), refreshMs);
    const onKey = (event: KeyboardEvent) => {
      const target = event.target as HTMLElement;
      if (event.key.length === 1 && !event.ctrlKey && !event.metaKey && !event.altKey && target.tagName !== "INPUT")
        input.current?.focus();
    };
    window.addEventListener("keydown", onKey);
    return () => {
      clearInterval(timer);
      window.removeEventListener("keydown", onKey);
    };
  }, [router]);

  const ask = (event: FormEvent) => {
    event.preventDefault();
    const serial = input.current?.value.trim().toUpperCase() ?? "";
    if (serial === "") return;
    const query = new URLSearchParams({ lot, package: chosen, serial, n: String(Date.now()) });
    startTransition(() => router.replace(`/stations/bench?${query}`, { scroll: false }));
  };

  return (
    <form onSubmit={ask} className="flex flex-col gap-1.5" aria-busy={pending}>
      <label htmlFor="scan" className="text-[22px] font-semibold">
        Scan the serial
      </label>
      <div className="flex gap-2.5">
        <input
          ref={input}
          id="scan"
          name="serial"
          autoComplete="off"
          autoCapitalize="characters"
          spellCheck={false}
          maxLength={64}
          enterKeyHint="go"
          // biome-ignore lint/a11y/noAutofocus: the page has one task, and a scanner types wherever the focus is
          autoFocus
          className="h-16 min-w-0 flex-1 rounded border-2 border-ink-faint bg-raised px-4 font-mono text-[26px]"
        />
        <button
          type="submit"
          disabled={pending}
          className="h-16 rounded border border-copper bg-copper px-5 text-[22px] font-semibold text-on-copper hover:border-copper-strong hover:bg-copper-strong disabled:opacity-60"
        >
          {pending ? "Asking" : "Ask"}
        </button>
      </div>
    </form>
  );
}
