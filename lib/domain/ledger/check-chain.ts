import { canonicalJson } from "@/lib/domain/canonical-json";
import type { LedgerContent } from "./ledger-event";

/** An event as stored, with the digest that its text has now. Digests as lower-case hex, times RFC 3339. */
export interface StoredEvent extends Omit<LedgerContent, "data"> {
  canonical: string;
  hash: string;
  /** SHA-256 of `canonical`. */
  digest: string;
}

export type Break = "gap" | "previous" | "hash" | "content";

/**
 * What is wrong with an event that should follow another one, null where it holds: its place (`gap`), the hash before it
 * (`previous`), its own hash (`hash`), or a column or a spelling that differs from the text that was hashed (`content`).
 */
export function findBreak(event: StoredEvent, before: { seq: number; hash: string }): Break | null {
  if (event.seq !== before.seq + 1) return "gap";
  if (event.previous !== before.hash) return "previous";
  if (event.digest !== event.hash) return "hash";
  return isAsHashed(event) ? null : "content";
}

function isAsHashed(event: StoredEvent): boolean {
  const hashed = parse(event.canonical);
  if (hashed === undefined || canonicalJson(hashed) !== event.canonical) return false;
  const members = ["seq", "at", "actor", "action", "subject", "previous"] as const;
  return members.every((member) => hashed[member] === event[member]);
}

function parse(text: string): LedgerContent | undefined {
  try {
    const value: unknown = JSON.parse(text);
    return typeof value === "object" && value !== null ? (value as LedgerContent) : undefined;
  } catch (error) {
    if (error instanceof SyntaxError) return undefined;
    throw error;
  }
}
