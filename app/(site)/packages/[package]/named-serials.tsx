import Link from "next/link";
import { formatCount } from "@/lib/domain/format/figure";

/** Serials of a finding: their number is whole, the list may be cut. */
export interface Named {
  count: number;
  serials: string[];
}

/** Serials under what they have in common; nothing where there is none. */
export function NamedSerials({ words, count, serials }: Named & { words: string }) {
  if (count === 0) return null;
  return (
    <div className="text-sm">
      <p className="font-semibold">
        {formatCount(count)} {words}
      </p>
      <p className="flex flex-wrap gap-x-3 gap-y-0.5">
        {serials.map((serial) => (
          <Link key={serial} href={`/trace/${encodeURIComponent(serial)}`} prefetch={false} className="font-mono">
            {serial}
          </Link>
        ))}
        {count > serials.length ? (
          <span className="text-ink-soft">and {formatCount(count - serials.length)} more</span>
        ) : null}
      </p>
    </div>
  );
}
