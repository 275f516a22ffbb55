"use client";

import { useEffect, useState } from "react";
import { Button } from "@/app/_components/button";
import { Notice } from "@/app/_components/notice";
import { TimeText } from "@/app/_components/time-text";
import { dropCopy, type LocalCopy, readCopy } from "./local-copy";

interface LocalCopyNoticeProps {
  family: string;
  version: string | undefined;
  draft: number | undefined;
  source: string;
  onTake: (text: string) => void;
  /** The draft was saved by somebody meanwhile: both texts are looked at. */
  onCompare: (text: string) => void;
}

/** Offers the text that this browser still holds from a tab that was closed, or a line that was lost, before it was saved. */
export function LocalCopyNotice({ family, version, draft, source, onTake, onCompare }: LocalCopyNoticeProps) {
  const [copy, setCopy] = useState<LocalCopy>();
  // Once, as the page opens: later copies are what is being typed.
  useEffect(() => {
    const found = readCopy(family, version);
    setCopy(found && found.text !== source ? found : undefined);
  }, [family, version, source]);
  if (!copy) return null;
  const overOlder = copy.draft !== undefined && copy.draft !== draft;
  return (
    <Notice tone="info" title="This browser holds a text that was not saved">
      <p className="mb-2">
        Typed on <TimeText at={copy.at} />
        {overOlder ? `, over draft ${copy.draft}; draft ${draft} was saved since.` : "."}
      </p>
      <div className="flex flex-wrap gap-2">
        <Button
          look="outline"
          onClick={() => {
            if (overOlder) onCompare(copy.text);
            else onTake(copy.text);
            setCopy(undefined);
          }}
        >
          {overOlder ? "Put the two together" : "Take it"}
        </Button>
        <Button
          onClick={() => {
            dropCopy(family, version);
            setCopy(undefined);
          }}
        >
          Drop it
        </Button>
      </div>
    </Notice>
  );
}
