"use client";

import { type ReactNode, useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { ComparisonView, type ComparisonViewProps } from "@/app/_components/difference/comparison-view";
import { markSeen, useSeen } from "../seen";

export interface OpenDifferencesProps {
  /** Given while the package waits for a decision: opening is noted for it. */
  reviewDigest: string | null;
  /** On the button. */
  words: string;
  comparison?: ComparisonViewProps;
  /** What is shown instead of a comparison. */
  children?: ReactNode;
}

/** The differences, shut until they are opened by hand: a signature rests on their having been looked at. */
export function OpenDifferences({ reviewDigest, words, comparison, children }: OpenDifferencesProps) {
  const seen = useSeen(reviewDigest ?? "");
  // What is decided over may change under an open page: then they are shut again.
  const [openedFor, setOpenedFor] = useState<string | null>();
  const open = () => {
    setOpenedFor(reviewDigest);
    if (reviewDigest !== null) markSeen(reviewDigest);
  };
  if (openedFor !== reviewDigest && !seen) {
    return (
      <Card title="Differences">
        <p className="mb-3 text-sm text-ink-soft">Serial by serial: values old → new, and the bytes.</p>
        <Button look="outline" onClick={open}>
          {words}
        </Button>
      </Card>
    );
  }
  return comparison ? <ComparisonView {...comparison} /> : children;
}
