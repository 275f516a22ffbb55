"use client";

import { Check, Copy } from "lucide-react";
import { useEffect, useState } from "react";

/** Puts the text on the clipboard and says so. */
export function CopyButton({ text, name }: { text: string; name: string }) {
  const [result, setResult] = useState<"copied" | "failed">();
  useEffect(() => {
    if (!result) return;
    const timer = setTimeout(() => setResult(undefined), 2_500);
    return () => clearTimeout(timer);
  }, [result]);

  const copy = () =>
    navigator.clipboard.writeText(text).then(
      () => setResult("copied"),
      () => setResult("failed"),
    );
  return (
    <button
      type="button"
      onClick={copy}
      aria-label={`Copy the ${name}`}
      title={`Copy the ${name}`}
      className="flex-none rounded p-0.5 text-ink-soft hover:text-copper-strong print:hidden"
    >
      {result === "copied" ? <Check size={16} aria-hidden /> : <Copy size={16} aria-hidden />}
      <span role="status" className="sr-only">
        {result === "copied" ? "Copied" : result === "failed" ? "The browser does not allow copying here" : ""}
      </span>
    </button>
  );
}
