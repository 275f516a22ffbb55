import type { StateMarkProps } from "@/app/_components/state/state-mark";

/** What kind of difference two images have. */
export const changeWords: Record<"same" | "version-only" | "values", StateMarkProps> = {
  same: { tone: "good", word: "the same bytes" },
  "version-only": { tone: "idle", word: "version numbers only" },
  values: { tone: "caution", word: "other values" },
};
