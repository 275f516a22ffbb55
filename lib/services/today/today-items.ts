import type { GrantRow, HeldRow, LiveRow, TroubleRow, WaitingRow } from "@/db/queries/today";
import type { TodayItem } from "@/schemas/api/today";

const count = (n: number, one: string, many: string): string => `${n.toLocaleString("en")} ${n === 1 ? one : many}`;
const devices = (n: number | null): string | null => (n === null ? null : count(n, "device", "devices"));
const joined = (...parts: (string | null)[]): string | null => parts.filter(Boolean).join(" · ") || null;

function titleOf(row: WaitingRow): string {
  if (row.kind === "family-revision") return `Family ${row.family}, revision ${row.version}`;
  if (row.kind === "layout") return `Layout ${row.family} ${row.version}`;
  if (row.kind === "derivation") return `Coefficients of ${row.lot}`;
  return `Package ${row.lot} ${row.version}`;
}

function linkOf(row: WaitingRow): string {
  const family = encodeURIComponent(row.family ?? "");
  if (row.kind === "family-revision") return `/families/${family}?revision=${row.version}`;
  if (row.kind === "layout") return `/families/${family}/layouts/${row.version}`;
  return row.kind === "derivation" ? `/derivations/${row.id}` : `/packages/${row.id}`;
}

function waitingItem(row: WaitingRow, detail: string | null, tone: TodayItem["tone"]): TodayItem {
  const { kind, person: who } = row;
  return { kind, title: titleOf(row), detail, who, at: row.at.toISOString(), tone, link: linkOf(row), digest: null };
}

/** Something that a reviewer may decide. */
export function decideItem(row: WaitingRow): TodayItem {
  if (row.kind === "waiver")
    return waitingItem(row, count(row.count ?? 0, "warning waits for a waiver", "warnings wait for a waiver"), "wait");
  if (row.kind === "reinstatement") return waitingItem(row, joined("to be made live again", row.reason), "wait");
  if (row.kind === "derivation") return waitingItem(row, joined(devices(row.count), "to be approved"), "wait");
  return waitingItem(row, joined(devices(row.count), "in review"), "wait");
}

/** Something that waits for another person's decision. */
export function awaitedItem(row: WaitingRow): TodayItem {
  const what =
    row.kind === "reinstatement" ? "to be made live again" : row.kind === "derivation" ? "to be approved" : "in review";
  return waitingItem(row, joined(devices(row.count), what), "wait");
}

/** An approved package that nobody made live yet. */
export function releaseItem(row: WaitingRow): TodayItem {
  return waitingItem(row, joined(devices(row.count), "approved, not live yet"), "good");
}

/** Own work that goes on when its maker does something about it. */
export function ownItem(row: WaitingRow): TodayItem {
  const refusal = row.state === "revoked" ? "approval taken back" : "refused";
  if (row.reason !== null) return waitingItem(row, `${refusal}: ${row.reason}`, "bad");
  if (row.state === "failed") return waitingItem(row, "failed", "bad");
  return waitingItem(
    row,
    joined(row.state === "draft" ? "draft, not submitted" : row.state, devices(row.count)),
    "idle",
  );
}

const OUTCOME: Record<string, string> = {
  verified: "verified",
  mismatch: "read back differs",
  failed: "writing failed",
  interrupted: "writing was interrupted",
  "unknown-image": "bytes of no known image",
  "unknown-serial": "serial is in no lot",
};

/** A record that somebody should look at. */
export function troubleItem(row: TroubleRow): TodayItem {
  return {
    kind: "write",
    title: row.serial,
    detail: joined(
      OUTCOME[row.outcome] ?? row.outcome,
      row.flags.length > 0 ? `flagged ${row.flags.join(", ")}` : null,
      row.version,
    ),
    who: `${row.operator}, ${row.station}`,
    at: row.at.toISOString(),
    tone: row.outcome === "verified" ? "wait" : "bad",
    link: `/trace/${encodeURIComponent(row.serial)}`,
    digest: null,
  };
}

/** A held device; who held it can't say that it may go on. */
export function heldItem(row: HeldRow, personId: string): TodayItem {
  return {
    kind: "device",
    title: row.serial,
    detail: joined(row.lot, row.reason, row.personId === personId ? "a second person has to let it go on" : null),
    who: row.person,
    at: row.at.toISOString(),
    tone: "bad",
    link: `/trace/${encodeURIComponent(row.serial)}`,
    digest: null,
  };
}

/** A role that a second admin has to confirm. */
export function roleItem(row: GrantRow): TodayItem {
  return {
    kind: "role",
    title: `${row.person} as ${row.role}`,
    detail: "waits for a second admin",
    who: row.askedBy,
    at: row.at.toISOString(),
    tone: "wait",
    link: "/people",
    digest: null,
  };
}

/** A live release, as operators see it. */
export function liveItem(row: LiveRow): TodayItem {
  return {
    kind: "live",
    title: `${row.lot} ${row.version}`,
    detail: joined(row.family, devices(row.devices)),
    who: null,
    at: row.at.toISOString(),
    tone: "good",
    link: "/stations/bench",
    digest: row.digest.toString("hex"),
  };
}
