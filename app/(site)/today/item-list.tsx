import Link from "next/link";
import { SealMark } from "@/app/_components/seal-mark";
import { ToneShape } from "@/app/_components/state/state-mark";
import { toneText } from "@/app/_components/state/tone";
import { TimeText } from "@/app/_components/time-text";
import type { TodayItem } from "@/schemas/api/today";

/** Words for the shape in front, for those who don't see it. */
const words: Record<TodayItem["tone"], string> = {
  good: "done",
  wait: "waits",
  bad: "wrong",
  info: "note",
  idle: "not begun",
};

/** Things to look at, each a link to where it is done. */
export function ItemList({ items }: { items: readonly TodayItem[] }) {
  return (
    <ul>
      {items.map((item) => (
        <li key={`${item.kind}${item.title}${item.at}`} className="border-b border-rule/55 last:border-0">
          <Link
            href={item.link}
            className="grid grid-cols-[18px_1fr] gap-x-2 py-2 text-ink no-underline hover:text-copper-strong sm:grid-cols-[18px_1fr_auto]"
          >
            <span className={`pt-1 ${toneText[item.tone]}`}>
              <ToneShape tone={item.tone} />
              <span className="sr-only">{words[item.tone]}: </span>
            </span>
            <span className="min-w-0">
              <span className={`font-semibold ${isCode(item) ? "font-mono" : ""}`}>{item.title}</span>
              {item.detail ? <span className="block text-sm text-ink-soft wrap-anywhere">{item.detail}</span> : null}
              {item.digest ? <SealMark digest={item.digest} look="inline" /> : null}
            </span>
            <span className="col-start-2 text-sm text-ink-soft sm:col-start-3 sm:text-right">
              {item.who ? <span className="sm:block">{item.who}</span> : null}
              {item.who ? <span className="sm:hidden"> · </span> : null}
              <TimeText at={item.at} />
            </span>
          </Link>
        </li>
      ))}
    </ul>
  );
}

const isCode = (item: TodayItem): boolean => item.kind === "lot" || item.kind === "write" || item.kind === "device";
