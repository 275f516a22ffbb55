import type { Finding } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";

/** A device's set as a decision sees it; state null where the device got no values. */
export interface DecidedSet {
  id: string;
  serial: string;
  role: string;
  state: string | null;
}

export type DecidedFinding = Finding & { id: string };

type Decision = "approve" | "refuse" | "revoke";

/** How many names a refusal carries; counts are whole. */
const NAMED_MAX = 200;

/** State a set has to be in for a decision to reach it. */
const REACHES: Record<Decision, string> = { approve: "proposed", refuse: "proposed", revoke: "approved" };

/**
 * The sets that a decision reaches: all that are still open to it, or exactly those named.
 * @throws AppError `derivation.serial_unknown` {serials}, `derivation.wrong_state` where nothing is left to decide or a
 * named device is not open to it
 */
export function chooseSets(sets: readonly DecidedSet[], decision: Decision, serials?: readonly string[]): DecidedSet[] {
  const needs = REACHES[decision];
  if (serials === undefined) {
    const open = sets.filter((set) => set.state === needs);
    if (open.length > 0) return open;
    throw new AppError("derivation.wrong_state", {
      needs,
      message: `No coefficients of this derivation are ${needs}.`,
    });
  }
  const bySerial = new Map(sets.map((set) => [set.serial, set]));
  const unknown = serials.filter((serial) => !bySerial.has(serial));
  if (unknown.length > 0) {
    const message = `${unknown.slice(0, 5).join(", ")}: not in this derivation.`;
    throw new AppError("derivation.serial_unknown", { serials: unknown.slice(0, NAMED_MAX), message });
  }
  const chosen = [...new Set(serials)].map((serial) => bySerial.get(serial) as DecidedSet);
  const closed = chosen.filter((set) => set.state !== needs);
  if (closed.length === 0) return chosen;
  const first = closed[0] as DecidedSet;
  const message = `${first.serial} is ${first.state ?? "without coefficients"}, not ${needs}.`;
  throw new AppError("derivation.wrong_state", {
    needs,
    serials: closed.slice(0, NAMED_MAX).map((set) => set.serial),
    message,
  });
}

/**
 * The findings that bear on an approval: those of the lot, and those of the devices approved. Approving everything at once
 * means all devices but the excluded ones, those without values too.
 */
export function findingsInReach(
  findings: readonly DecidedFinding[],
  sets: readonly DecidedSet[],
  serials?: readonly string[],
): DecidedFinding[] {
  const inReach = new Set(serials ?? sets.filter((set) => set.role !== "excluded").map((set) => set.serial));
  return findings.filter(({ serial }) => serial === null || inReach.has(serial));
}

/** Refuses an approval that a hard finding stands against. @throws AppError `derivation.hard_finding` {findings, count} */
export function assertNoHardFinding(findings: readonly DecidedFinding[]): void {
  const hard = findings.filter((finding) => finding.severity === "hard");
  if (hard.length > 0) throw refusal("derivation.hard_finding", hard, "This stands against approval");
}

/**
 * Refuses an approval with a soft finding that nobody accepted with a reason.
 * @param acknowledged ids of findings accepted now or earlier.
 * @throws AppError `derivation.not_acknowledged` {findings, count}
 */
export function assertAcknowledged(findings: readonly DecidedFinding[], acknowledged: ReadonlySet<string>): void {
  const open = findings.filter((finding) => finding.severity === "soft" && !acknowledged.has(finding.id));
  if (open.length > 0) throw refusal("derivation.not_acknowledged", open, "Acknowledge this with a reason");
}

function refusal(code: string, findings: readonly DecidedFinding[], words: string): AppError {
  const named = findings
    .slice(0, NAMED_MAX)
    .map(({ id, code, serial, point, message }) => ({ id, code, serial, point, message }));
  const [first] = named;
  const more = findings.length > 1 ? ` And ${findings.length - 1} more.` : "";
  const message = `${words}: ${first?.serial ? `${first.serial}: ` : ""}${first?.message ?? ""}${more}`;
  return new AppError(code, { findings: named, count: findings.length, message });
}

/**
 * Which findings an acknowledgement means: one by its id, or all of a code among those that bear on the approval.
 * @throws AppError `derivation.finding_unknown` {finding}
 */
export function resolveAcknowledgements(
  all: readonly DecidedFinding[],
  inReach: readonly DecidedFinding[],
  given: readonly { finding: string; reason: string }[],
): Map<string, string> {
  const byId = new Map(all.map((finding) => [finding.id, finding]));
  const reasons = new Map<string, string>();
  for (const { finding, reason } of given) {
    const one = byId.get(finding.toLowerCase());
    const meant = one ? [one] : inReach.filter((other) => other.code === finding && other.severity === "soft");
    if (meant.length === 0) {
      throw new AppError("derivation.finding_unknown", {
        finding,
        message: `${finding} is no finding that this approval meets.`,
      });
    }
    for (const { id } of meant) reasons.set(id, reason);
  }
  return reasons;
}

/** The state of a derivation by the states of its sets; undefined where they say nothing (all stale, or none). */
export function stateBySets(
  counts: Partial<Record<string, number>>,
): "proposed" | "approved" | "partly-approved" | "refused" | undefined {
  const { approved = 0, proposed = 0, refused = 0, revoked = 0 } = counts;
  if (approved > 0) return proposed + refused + revoked > 0 ? "partly-approved" : "approved";
  if (proposed > 0) return "proposed";
  return refused + revoked > 0 ? "refused" : undefined;
}
