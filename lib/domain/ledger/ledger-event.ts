import { canonicalJson } from "@/lib/domain/canonical-json";

/** One event of the ledger without its hash; what is hashed is exactly the RFC 8785 form of this. */
export interface LedgerContent {
  seq: number;
  /** RFC 3339 UTC with milliseconds. */
  at: string;
  /** A person's or station's id, or `system`. */
  actor: string;
  /** `noun.verb` in the past tense. */
  action: string;
  subject: string;
  data: Record<string, unknown>;
  /** Lower-case hex SHA-256 of the event before, 64 zeros for the first. */
  previous: string;
}

export const FIRST_PREVIOUS = "0".repeat(64);

/** The text that is hashed and stored for an event. @throws AppError when `data` has no canonical form */
export function canonicalEvent(content: LedgerContent): string {
  return canonicalJson(content);
}
