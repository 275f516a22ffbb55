"use client";

import { useMemo, useState } from "react";
import { Button } from "@/app/_components/button";
import { Dialog } from "@/app/_components/dialog";
import { TimeText } from "@/app/_components/time-text";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { compareDrafts, type DraftDifference, mergeDrafts } from "./merge-drafts";
import type { DraftConflict } from "./use-draft";

interface ConflictDialogProps {
  conflict: DraftConflict;
  mine: string;
  /** The text to go on with; both others stay in the editor's history. */
  onChoose: (text: string, words: string) => void;
  /** Looks at the page first; the question stays open. */
  onLater: () => void;
}

/** Two people saved one draft: theirs, mine, or the two put together place by place. */
export function ConflictDialog({ conflict, mine, onChoose, onLater }: ConflictDialogProps) {
  const differences = useMemo(
    () => compareDrafts(conflict.base, mine, conflict.theirs),
    [conflict.base, conflict.theirs, mine],
  );
  const [chosen, setChosen] = useState<ReadonlySet<string>>(
    () => new Set(differences?.filter((one) => one.changedBy === "them").map((one) => one.key)),
  );
  const choose = (key: string, theirs: boolean) => {
    const next = new Set(chosen);
    if (theirs) next.add(key);
    else next.delete(key);
    setChosen(next);
  };
  const together = () => onChoose(mergeDrafts(mine, differences ?? [], chosen), "The two texts are put together");
  return (
    <Dialog
      open
      onOpenChange={(open) => open || onLater()}
      size="wide"
      title="Two people wrote this draft"
      description={
        <>
          {conflict.by} saved draft {conflict.draft} on <TimeText at={conflict.at} /> while it was open here. Neither
          text is lost: what you don't take stays in the editor's history, one undo away.
        </>
      }
    >
      {differences === null ? (
        <p className="text-sm text-ink-soft">One of the two is not JSON, so they can only be taken as a whole.</p>
      ) : differences.length === 0 ? (
        <p className="text-sm text-ink-soft">They say the same and differ in spaces and line breaks only.</p>
      ) : (
        <DifferenceChoice differences={differences} chosen={chosen} by={conflict.by} onChoose={choose} />
      )}
      <div className="mt-4 flex flex-wrap justify-end gap-2.5">
        <Button onClick={() => onChoose(conflict.theirs, `${conflict.by}’s text is taken`)}>Take theirs</Button>
        <Button onClick={() => onChoose(mine, "Your text is kept")}>Keep mine</Button>
        {differences && differences.length > 0 ? (
          <Button look="primary" onClick={together}>
            Put together with {formatNumberOf(chosen.size, "place")} of theirs
          </Button>
        ) : null}
      </div>
    </Dialog>
  );
}

const changed = { me: "only you changed it", them: "only they changed it", both: "both changed it" };

interface DifferenceChoiceProps {
  differences: readonly DraftDifference[];
  chosen: ReadonlySet<string>;
  by: string;
  onChoose: (key: string, theirs: boolean) => void;
}

function DifferenceChoice({ differences, chosen, by, onChoose }: DifferenceChoiceProps) {
  return (
    <div className="max-h-[50dvh] overflow-auto rounded border border-rule">
      <table className="w-full text-sm">
        <thead>
          <tr className="border-b border-rule text-left">
            <th scope="col" className="px-3 py-1.5">
              Where
            </th>
            <th scope="col" className="px-3">
              Yours
            </th>
            <th scope="col" className="px-3">
              {by}’s
            </th>
          </tr>
        </thead>
        <tbody>
          {differences.map(({ key, where, mine, theirs, changedBy }) => (
            <tr key={key} className="border-b border-rule/55 align-baseline last:border-0">
              <th scope="row" className="px-3 py-1.5 text-left font-normal">
                <span className="block font-mono">{where}</span>
                <span className="block text-xs text-ink-soft">{changed[changedBy]}</span>
              </th>
              {[
                { text: mine, isTheirs: false },
                { text: theirs, isTheirs: true },
              ].map(({ text, isTheirs }) => (
                <td key={String(isTheirs)} className="max-w-[300px] px-3 py-1.5">
                  <label className="flex items-baseline gap-2">
                    <input
                      type="radio"
                      name={key}
                      checked={chosen.has(key) === isTheirs}
                      onChange={() => onChoose(key, isTheirs)}
                      className="accent-copper"
                    />
                    <span className="min-w-0 font-mono wrap-anywhere">
                      <span className="sr-only">{isTheirs ? "theirs: " : "yours: "}</span>
                      {text ?? "not there"}
                    </span>
                  </label>
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
