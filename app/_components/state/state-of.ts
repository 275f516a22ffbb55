import type { StateMarkProps } from "@/app/_components/state/state-mark";

const draft: StateMarkProps = {
  tone: "info",
  shape: "square",
  word: "draft",
  title: "Being written; nothing rests on it yet",
};
const inReview: StateMarkProps = { tone: "wait", word: "in review", title: "Waits for a second person" };

const published = {
  draft,
  "in-review": inReview,
  published: { tone: "good", word: "published", title: "Frozen, decided by a second person" },
  retired: { tone: "idle", word: "retired", title: "No longer offered for new work" },
} satisfies Record<string, StateMarkProps>;

/** Word, tone and shape of every state of the product, by kind of object. */
const states = {
  revision: published,
  layout: published,
  lot: {
    planned: { tone: "idle", word: "planned", title: "Serials at most, no readings yet" },
    reading: { tone: "info", word: "readings", title: "Runs are there, nothing derived yet" },
    derived: { tone: "info", word: "derived", title: "Coefficients are there, no package yet" },
    building: { tone: "info", word: "packing", title: "A package is in the making" },
    "in-review": inReview,
    approved: { tone: "good", shape: "ring", word: "approved", title: "A package is signed, not yet live" },
    live: { tone: "good", word: "live", title: "Stations write a package of this lot" },
  },
  derivation: {
    working: { tone: "wait", word: "working", title: "Being computed" },
    proposed: { tone: "wait", word: "waiting for a second person" },
    approved: { tone: "good", word: "approved" },
    "partly-approved": { tone: "caution", word: "partly approved", title: "Some devices approved, others not" },
    refused: { tone: "bad", word: "refused" },
    failed: { tone: "bad", word: "failed" },
  },
  "coefficient-set": {
    proposed: { tone: "info", word: "proposed", title: "Computed, nobody has decided yet" },
    approved: { tone: "good", word: "approved" },
    refused: { tone: "bad", word: "refused" },
    stale: { tone: "caution", word: "stale", title: "Its run was superseded or its family revision left" },
    revoked: { tone: "bad", word: "revoked", title: "Approval taken back; never packed again" },
  },
  package: {
    building: { tone: "wait", word: "building" },
    draft,
    failed: { tone: "bad", word: "failed", title: "The build did not finish; nothing was stored" },
    "in-review": inReview,
    approved: { tone: "good", shape: "ring", word: "approved", title: "Signed by a second person, not yet live" },
    refused: { tone: "bad", word: "refused" },
    live: { tone: "good", word: "live", title: "What stations write now" },
    superseded: { tone: "idle", word: "superseded", title: "Another release went live after it" },
    withdrawn: { tone: "bad", word: "withdrawn", title: "Stopped; no station may write it" },
  },
  "run-plan": {
    planned: { tone: "wait", word: "planned", title: "Waits for its readings" },
    used: { tone: "good", word: "read", title: "Readings were uploaded for it" },
    dropped: { tone: "idle", word: "dropped", title: "Will not be run" },
  },
  reinstatement: {
    asked: { tone: "wait", word: "asked", title: "Waits for a second person" },
    done: { tone: "good", word: "done" },
    refused: { tone: "bad", word: "refused" },
  },
  device: {
    active: { tone: "good", word: "active" },
    held: { tone: "bad", shape: "bar", word: "held", title: "Stopped by one person; going on takes two" },
    scrapped: { tone: "bad", word: "scrapped" },
    rework: { tone: "caution", word: "in rework" },
    shipped: { tone: "idle", shape: "dot", word: "shipped" },
    returned: { tone: "caution", word: "returned" },
  },
  /** What a device carries, by its deciding write record. */
  trace: {
    "carries-live": { tone: "good", word: "carries the live image" },
    "carries-live-values": {
      tone: "good",
      word: "carries the live values",
      title: "Another release, equal to the live one in everything but version numbers",
    },
    "carries-other-values": {
      tone: "caution",
      word: "carries other values than the live ones",
      title: "Stands on the lot's re-write list",
    },
    "carries-unreleased": {
      tone: "caution",
      word: "carries an image nothing live compares with",
      title: "Nothing is live for the lot, or the live release has no image of this device",
    },
    unknown: {
      tone: "bad",
      shape: "half",
      word: "what it carries is unknown",
      title: "The last write was not verified, or the board was replaced since",
    },
    "never-written": { tone: "idle", word: "never written", title: "No station has reported a write" },
    held: { tone: "bad", shape: "bar", word: "held", title: "Stopped by one person; going on takes two" },
    scrapped: { tone: "bad", word: "scrapped" },
  },
  station: {
    active: { tone: "good", word: "active" },
    stopped: { tone: "bad", shape: "bar", word: "stopped", title: "All its keys are refused" },
  },
  rewrite: {
    "never-written": { tone: "idle", word: "never written" },
    unknown: { tone: "bad", shape: "half", word: "unknown", title: "The last write was not verified" },
    "other-values": { tone: "caution", word: "other values", title: "Not equal in values to the live image" },
  },
  check: {
    pass: { tone: "good", word: "pass" },
    warn: { tone: "wait", word: "warn", title: "Needs a waiver before review" },
    waived: { tone: "caution", word: "waived", title: "Accepted by a named person with a reason" },
    fail: { tone: "bad", word: "fail", title: "Blocks the package" },
  },
  finding: {
    hard: { tone: "bad", word: "blocks", title: "Approval is not possible" },
    soft: { tone: "caution", word: "needs a reason", title: "Approval needs an acknowledgement with a reason" },
    note: { tone: "info", word: "note" },
  },
  "write-outcome": {
    verified: { tone: "good", word: "verified", title: "What was read back equals what should be there" },
    mismatch: { tone: "bad", word: "mismatch", title: "What was read back differs" },
    failed: { tone: "bad", word: "failed" },
    interrupted: { tone: "caution", word: "interrupted", title: "What the device carries now is unknown" },
    "unknown-image": { tone: "bad", word: "unknown image" },
    "unknown-serial": { tone: "bad", word: "unknown serial" },
    duplicate: { tone: "idle", word: "known already" },
    conflict: { tone: "bad", word: "conflict", title: "The same record arrived with other content" },
  },
  person: {
    active: { tone: "good", word: "active" },
    waiting: { tone: "wait", word: "no password yet", title: "Has a link to choose a password and has not used it" },
    deactivated: { tone: "bad", shape: "bar", word: "deactivated", title: "Can't sign in; sessions and keys ended" },
  },
  "access-key": {
    working: { tone: "good", word: "works" },
    expired: { tone: "idle", word: "ran out" },
    revoked: { tone: "bad", shape: "bar", word: "revoked" },
  },
  mail: {
    waiting: { tone: "wait", word: "waiting", title: "The worker sends it in a moment" },
    sent: { tone: "good", word: "sent", title: "The mail server took it" },
    kept: { tone: "idle", word: "kept here", title: "No mail server is set; this is what would have been sent" },
    failed: { tone: "bad", word: "failed", title: "The mail server refused it or does not answer" },
  },
  /** Output of written devices against the prediction from their image. */
  proof: {
    agrees: { tone: "good", word: "agrees", title: "The output is what the decoded image predicts" },
    differs: { tone: "bad", word: "differs", title: "The firmware computes otherwise than the image predicts" },
    "not-judged": { tone: "idle", word: "not judged" },
    open: { tone: "wait", word: "first-off open", title: "No written device was proven yet" },
  },
  dump: {
    exact: { tone: "good", word: "equal to the image" },
    differs: { tone: "bad", word: "differs" },
    "other-serial": { tone: "bad", word: "image of another serial" },
    unknown: { tone: "caution", word: "unknown image" },
  },
} satisfies Record<string, Record<string, StateMarkProps>>;

export type StateKind = keyof typeof states;

/** Mark of a state. A state without an entry is shown in its own words, so that nothing new disappears from sight. */
export function stateOf(kind: StateKind, state: string): StateMarkProps {
  const known: Record<string, StateMarkProps> = states[kind];
  return known[state] ?? { tone: "idle", word: state.replaceAll("-", " ") };
}
