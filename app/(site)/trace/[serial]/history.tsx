import Link from "next/link";
import { ToneShape } from "@/app/_components/state/state-mark";
import { toneText } from "@/app/_components/state/tone";
import { TimeText } from "@/app/_components/time-text";
import type { HistoryEntry } from "@/schemas/api/devices";

export interface HistoryProps {
  entries: readonly HistoryEntry[];
  /** Operators see what happened, but the pages of packages and runs are not theirs. */
  linked: boolean;
}

/** Everything that happened to a device, newest first, back to its readings. */
export function History({ entries, linked }: HistoryProps) {
  if (entries.length === 0)
    return (
      <p className="text-sm text-ink-soft">Nothing has happened to it yet: no readings, no coefficients, no writes.</p>
    );
  return (
    <ol>
      {entries.map((entry, index) => (
        <li
          // biome-ignore lint/suspicious/noArrayIndexKey: two things may happen in one moment
          key={index}
          className="grid break-inside-avoid grid-cols-[18px_1fr] gap-x-2.5 border-b border-rule py-2.5"
        >
          <span className={`pt-1 ${toneText[entry.tone]}`}>
            <ToneShape tone={entry.tone} />
          </span>
          <div className="min-w-0">
            <div className="font-semibold">
              {linked && entry.link ? (
                <Link href={entry.link} className="text-ink no-underline hover:underline">
                  {entry.what}
                </Link>
              ) : (
                entry.what
              )}
            </div>
            <div className="text-sm text-ink-soft">
              <TimeText at={entry.at} />
              {entry.who ? ` · ${entry.who}` : ""}
            </div>
            {entry.detail ? <div className="text-sm text-ink-soft wrap-anywhere">{entry.detail}</div> : null}
          </div>
        </li>
      ))}
    </ol>
  );
}
