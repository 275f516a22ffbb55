import type { ReactNode } from "react";
import { ToneShape } from "@/app/_components/state/state-mark";
import { type Tone, toneText } from "@/app/_components/state/tone";

export interface NoticeProps {
  tone?: Extract<Tone, "info" | "caution" | "bad" | "good">;
  title?: string;
  children: ReactNode;
}

const edges = {
  info: "border-l-slate",
  caution: "border-l-ochre",
  bad: "border-l-oxide",
  good: "border-l-verdigris",
};
const words = { info: "Note", caution: "Caution", bad: "Stop", good: "Done" };

/** Something to know before going on. Cautions about people, devices and measurements belong here. */
export function Notice({ tone = "info", title, children }: NoticeProps) {
  return (
    <div role="note" className={`rounded border border-rule border-l-2 bg-raised px-4 py-3 text-sm ${edges[tone]}`}>
      <p className={`flex items-center gap-1.5 font-semibold ${toneText[tone]}`}>
        <ToneShape tone={tone} />
        {title ?? words[tone]}
      </p>
      <div className="mt-1 text-ink">{children}</div>
    </div>
  );
}
