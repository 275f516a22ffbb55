/** What a state means to the reader. The word beside it says which state it is. */
export type Tone = "good" | "wait" | "bad" | "info" | "idle" | "caution";

/** Shape that stands for a tone, so that colour never tells alone. */
export type Shape = "dot" | "half" | "cross" | "ring" | "bar" | "square";

export const toneText: Record<Tone, string> = {
  good: "text-verdigris",
  wait: "text-ochre",
  caution: "text-ochre",
  bad: "text-oxide",
  info: "text-slate",
  idle: "text-ink-soft",
};

export const toneShape: Record<Tone, Shape> = {
  good: "dot",
  wait: "half",
  caution: "bar",
  bad: "cross",
  info: "ring",
  idle: "ring",
};
