import Link from "next/link";
import { StateMark, ToneShape } from "@/app/_components/state/state-mark";
import type { Tone } from "@/app/_components/state/tone";

export const stitchNames = ["Serials", "Readings", "Coefficients", "Package", "Review", "Written"] as const;

export interface Stitch {
  /** good: done; wait: the work that is due; idle: not begun; bad: blocked. */
  tone: Extract<Tone, "good" | "wait" | "idle" | "bad">;
  /** What stands there, as "28 in MW20-2609"; "—" where nothing does. */
  count: string;
  href?: string;
  /** Why the next one can't begin, in words. */
  blocked?: string;
}

export interface ThreadProps {
  /** Serials, readings, coefficients, package, review, written. */
  stitches: readonly [Stitch, Stitch, Stitch, Stitch, Stitch, Stitch];
  /** Stitch of the page shown, 0 to 5. */
  current?: number;
}

const words = { good: "done", wait: "due", idle: "not begun", bad: "blocked" };

/** A lot's thread: progress and navigation in one line of six stitches. */
export function Thread({ stitches, current }: ThreadProps) {
  return (
    <nav aria-label="Thread of the lot" className="relative mb-5 overflow-x-auto border-y border-rule">
      <ol className="grid min-w-[680px] grid-cols-6 bg-[linear-gradient(var(--rule),var(--rule))] bg-size-[100%_1px] bg-position-[0_19px] bg-no-repeat">
        {stitches.map((stitch, index) => (
          <li key={stitchNames[index]} className={index === current ? "shadow-[inset_0_-2px_var(--copper)]" : ""}>
            <StitchBody stitch={stitch} name={stitchNames[index] ?? ""} current={index === current} />
          </li>
        ))}
      </ol>
    </nav>
  );
}

function StitchBody({ stitch, name, current }: { stitch: Stitch; name: string; current: boolean }) {
  const tones = { good: "text-verdigris", wait: "text-ochre", idle: "text-ink-faint", bad: "text-oxide" };
  const body = (
    <>
      <span className="flex w-max items-center gap-[7px] bg-paper pr-2.5 text-sm font-semibold">
        <span className={tones[stitch.tone]}>
          <ToneShape tone={stitch.tone} />
        </span>
        {name}
        <span className="sr-only">, {words[stitch.tone]}</span>
      </span>
      <span className="mt-0.5 block text-xs text-ink-soft">{stitch.count}</span>
      {stitch.blocked ? (
        <span className="mt-0.5 block">
          <StateMark tone={stitch.tone === "bad" ? "bad" : "wait"} word={stitch.blocked} />
        </span>
      ) : null}
    </>
  );
  const look = "block h-full pt-2 pr-3 pb-[9px] text-ink no-underline";
  if (!stitch.href) return <div className={look}>{body}</div>;
  return (
    <Link href={stitch.href} aria-current={current ? "step" : undefined} className={`${look} hover:text-copper-strong`}>
      {body}
    </Link>
  );
}
