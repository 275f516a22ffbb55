"use client";

import { X } from "lucide-react";
import { Toast as Radix } from "radix-ui";
import { createContext, type ReactNode, useCallback, useContext, useMemo, useState } from "react";
import { ToneShape } from "@/app/_components/state/state-mark";
import { type Tone, toneText } from "@/app/_components/state/tone";

export interface ToastMessage {
  tone: Tone;
  title: string;
  text?: string;
}

interface Entry extends ToastMessage {
  id: number;
}

const ToastContext = createContext<((message: ToastMessage) => void) | null>(null);

/** Announces a result: `const tell = useToast(); tell({ tone: "good", title: "Release 1.2.0 approved" })`. */
export function useToast(): (message: ToastMessage) => void {
  const tell = useContext(ToastContext);
  if (!tell) throw new Error("useToast needs ToastProvider above it");
  return tell;
}

export function ToastProvider({ children }: { children: ReactNode }) {
  const [entries, setEntries] = useState<Entry[]>([]);
  const tell = useCallback((message: ToastMessage) => {
    setEntries((before) => [...before, { ...message, id: (before.at(-1)?.id ?? 0) + 1 }]);
  }, []);
  const close = useCallback((id: number) => setEntries((before) => before.filter((entry) => entry.id !== id)), []);
  const value = useMemo(() => tell, [tell]);

  return (
    <ToastContext value={value}>
      <Radix.Provider swipeDirection="right" label="Result">
        {children}
        {entries.map((entry) => (
          <Radix.Root
            key={entry.id}
            type={entry.tone === "bad" ? "foreground" : "background"}
            duration={entry.tone === "bad" ? 20_000 : 7_000}
            onOpenChange={(open) => !open && close(entry.id)}
            className="flex items-start gap-3 rounded border border-rule bg-raised p-4 shadow-(--overlay-shadow)"
          >
            <span className={`mt-1 ${toneText[entry.tone]}`}>
              <ToneShape tone={entry.tone} />
            </span>
            <div className="min-w-0 flex-1">
              <Radix.Title className="font-semibold">{entry.title}</Radix.Title>
              {entry.text ? (
                <Radix.Description className="text-sm text-ink-soft">{entry.text}</Radix.Description>
              ) : null}
            </div>
            <Radix.Close aria-label="Close" className="rounded p-1 text-ink-soft hover:text-ink">
              <X size={16} aria-hidden />
            </Radix.Close>
          </Radix.Root>
        ))}
        <Radix.Viewport className="fixed right-4 bottom-4 z-50 flex w-[min(380px,calc(100vw-32px))] flex-col gap-2 print:hidden" />
      </Radix.Provider>
    </ToastContext>
  );
}
