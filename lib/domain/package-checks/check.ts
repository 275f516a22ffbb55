import { formatCount } from "@/lib/domain/format/figure";

/** The checks of a package, in the order in which they are told. */
export const CHECK_CODES = [
  "coverage",
  "decided-sets",
  "firmware",
  "limits",
  "round-trip",
  "reserved-bytes",
  "hex-reading",
  "repeatability",
  "outliers",
  "equal-images",
  "pooling",
  "verification",
  "proven-range",
  "twin",
  "first-off",
  "live-difference",
] as const;

export type CheckCode = (typeof CHECK_CODES)[number];

/** One machine-made verdict with its evidence. */
export interface PackageCheck {
  code: CheckCode;
  verdict: "pass" | "warn" | "fail";
  /** In plain words, with figures. */
  message: string;
  evidence: Record<string, unknown>;
}

/** Most names that evidence lists; counts beside a list are whole. */
export const EVIDENCE_MAX = 200;

/** Most serials that a sentence names. */
const SENTENCE_MAX = 3;

/** Serials as evidence: their number and the first of them. */
export function serialEvidence(serials: readonly string[]): { count: number; serials: string[] } {
  return { count: serials.length, serials: serials.slice(0, EVIDENCE_MAX) };
}

/** "1 device", "28 devices". */
export function devices(count: number): string {
  return count === 1 ? "1 device" : `${formatCount(count)} devices`;
}

/** The first few serials of a list, for a sentence; `count` is the number of all where the list is cut. */
export function someSerials(serials: readonly string[], count = serials.length): string {
  const shown = serials.slice(0, SENTENCE_MAX);
  const more = count - shown.length;
  return shown.join(", ") + (more > 0 ? ` and ${formatCount(more)} more` : "");
}
