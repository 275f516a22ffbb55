"use client";

import Link from "next/link";
import { useEffect, useState } from "react";
import { Button } from "@/app/_components/button";

const storeKey = "trimwright.recent-serials";
const keptMax = 12;

function readRecent(): string[] {
  try {
    const kept: unknown = JSON.parse(localStorage.getItem(storeKey) ?? "[]");
    return Array.isArray(kept) ? kept.filter((one): one is string => typeof one === "string").slice(0, keptMax) : [];
  } catch {
    // Storage may be switched off or hold something else; the list is a convenience.
    return [];
  }
}

function keep(serials: readonly string[]): void {
  try {
    localStorage.setItem(storeKey, JSON.stringify(serials));
  } catch {
    // As above.
  }
}

/** Remembers in this browser that a serial was looked up. */
export function RememberSerial({ serial }: { serial: string }) {
  useEffect(() => keep([serial, ...readRecent().filter((one) => one !== serial)].slice(0, keptMax)), [serial]);
  return null;
}

/** Serials looked up last in this browser; nothing where there are none. */
export function RecentSerials() {
  const [serials, setSerials] = useState<string[]>([]);
  useEffect(() => setSerials(readRecent()), []);
  if (serials.length === 0)
    return <p className="text-sm text-ink-soft">Serials that you look up in this browser will stand here.</p>;
  return (
    <div className="flex flex-wrap items-center gap-2">
      {serials.map((serial) => (
        <Link
          key={serial}
          href={`/trace/${encodeURIComponent(serial)}`}
          prefetch={false}
          className="rounded border border-rule px-2.5 py-1 font-mono text-sm text-ink no-underline hover:border-copper"
        >
          {serial}
        </Link>
      ))}
      <Button
        onClick={() => {
          keep([]);
          setSerials([]);
        }}
      >
        Forget them
      </Button>
    </div>
  );
}
