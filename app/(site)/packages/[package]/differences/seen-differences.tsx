"use client";

import { useEffect } from "react";
import { markSeen } from "../seen";

/** Notes for this window that the differences behind a review digest were opened, so that it may be signed. */
export function SeenDifferences({ reviewDigest }: { reviewDigest: string | null }) {
  useEffect(() => {
    if (reviewDigest !== null) markSeen(reviewDigest);
  }, [reviewDigest]);
  return null;
}
