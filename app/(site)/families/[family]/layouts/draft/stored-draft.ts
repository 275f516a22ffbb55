import { setOut } from "@/lib/domain/json-set-out";
import type { PublishState } from "@/schemas/api/families";
import type { DraftConflict } from "./use-draft";

/** A draft as the server has it now, as far as an editor needs to know. */
export interface StoredDraft {
  state: PublishState;
  draft: number;
  unfinished: boolean;
  updatedAt: string;
  updatedBy: string;
  submittedAt: string | null;
  submittedBy: string | null;
  /** Null where the draft that was named still stands. */
  source: string | null;
}

/** What an editor has. */
export interface HeldDraft {
  draft: number | undefined;
  /** Text of that draft, and the text as it was typed on. */
  saved: string;
  text: string;
}

/** What happened to a draft elsewhere while it was open here. */
export type DraftNews =
  | ({ kind: "text" } & DraftConflict)
  /** Nobody writes it now; `by` and `at` where they are known. */
  | { kind: "closed"; state: PublishState | "dropped"; by: string | null; at: string | null };

/** What to do about a stored draft: nothing, go on from its number, or tell the person. */
export type Heard =
  | { kind: "nothing" }
  | { kind: "adopt"; saved: string; draft: number; by: string }
  | { kind: "news"; news: DraftNews };

/** @param stored "dropped" where the layout is not there any more. */
export function hearStored(held: HeldDraft, stored: StoredDraft | "dropped"): Heard {
  if (stored === "dropped") return closed("dropped", null, null);
  if (stored.state !== "draft") return closed(stored.state, stored.submittedBy, stored.submittedAt);
  if (stored.source === null || stored.draft === held.draft) return { kind: "nothing" };
  const theirs = setOut(stored.source);
  const { draft, updatedBy: by, updatedAt: at } = stored;
  // Saved under another number, yet no other text: a save whose answer was lost, or one that was undone again.
  if (theirs === held.text || theirs === held.saved) return { kind: "adopt", saved: theirs, draft, by };
  return { kind: "news", news: { kind: "text", base: held.saved, theirs, draft, by, at } };
}

const closed = (state: PublishState | "dropped", by: string | null, at: string | null): Heard => ({
  kind: "news",
  news: { kind: "closed", state, by, at },
});
