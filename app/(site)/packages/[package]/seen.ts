"use client";

import { useCallback, useSyncExternalStore } from "react";

const changed = "differences-seen";
const keyOf = (reviewDigest: string) => `seen ${reviewDigest}`;
/** Where the browser refuses storage, what was seen lasts as long as the page. */
const seenHere = new Set<string>();

/**
 * Notes that the differences behind a review digest were opened in this window. Anything that changes what is decided over
 * changes the digest, and then they have to be opened again.
 */
export function markSeen(reviewDigest: string): void {
  seenHere.add(reviewDigest);
  try {
    sessionStorage.setItem(keyOf(reviewDigest), "yes");
  } catch {
    // Noted in the page's own memory above.
  }
  window.dispatchEvent(new Event(changed));
}

function wasSeen(reviewDigest: string): boolean {
  if (seenHere.has(reviewDigest)) return true;
  try {
    return sessionStorage.getItem(keyOf(reviewDigest)) !== null;
  } catch {
    return false;
  }
}

function subscribe(onChange: () => void): () => void {
  window.addEventListener(changed, onChange);
  return () => window.removeEventListener(changed, onChange);
}

/** Whether the differences behind a review digest were opened in this window. */
export function useSeen(reviewDigest: string): boolean {
  const read = useCallback(() => wasSeen(reviewDigest), [reviewDigest]);
  return useSyncExternalStore(subscribe, read, () => false);
}
