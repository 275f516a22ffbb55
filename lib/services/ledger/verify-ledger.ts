import { createHash } from "node:crypto";
import type { Db } from "@/db/executor";
import * as query from "@/db/queries/ledger";
import { findBreak, type StoredEvent } from "@/lib/domain/ledger/check-chain";
import { FIRST_PREVIOUS } from "@/lib/domain/ledger/ledger-event";
import type { Ctx } from "@/lib/services/context";
import type { LedgerVerdict } from "@/schemas/api/ledger";

const MESSAGES = {
  gap: "An event is missing before this one.",
  previous: "This event does not continue the one before it.",
  hash: "The text of this event is not the one that was hashed.",
  content: "A column of this event differs from the text that was hashed.",
  text: "A text of this event is not the one whose hash stands in the chain.",
  "cut-off":
    "A signed release names a later head than this ledger has: events are missing at its end, or the chain was rewritten.",
} as const;

type Reason = keyof typeof MESSAGES;

/**
 * Walks the whole chain in pages and computes every hash again: places, previous hashes, texts and columns of all events, the
 * texts that were not erased against their salted hashes, and the heads that signed releases name.
 */
export async function verifyLedger(ctx: Ctx): Promise<LedgerVerdict> {
  // Before the end is looked up: what a release names then stands in the chain already.
  const heads = new Set(await query.listReleasedHeads(ctx.db));
  heads.delete(FIRST_PREVIOUS);
  const end = (await query.findLedgerHead(ctx.db))?.seq ?? 0;
  let before = { seq: 0, hash: FIRST_PREVIOUS };
  for await (const rows of query.eachLedgerEvents(ctx.db, end)) {
    const badText = await findBadText(ctx.db, rows);
    for (const row of rows) {
      const event = storedEvent(row);
      const wrong = findBreak(event, before);
      if (wrong) return broken(wrong === "gap" ? before.seq + 1 : event.seq, wrong);
      if (event.seq === badText) return broken(event.seq, "text");
      heads.delete(event.hash);
      before = event;
    }
  }
  if (heads.size > 0) return broken(before.seq + 1, "cut-off");
  return { ok: true, events: before.seq, head: before.hash };
}

const broken = (brokenAt: number, reason: Reason): LedgerVerdict => ({
  ok: false,
  brokenAt,
  reason,
  message: MESSAGES[reason],
});

function storedEvent(row: query.LedgerRow): StoredEvent {
  return {
    ...row,
    at: row.at.toISOString(),
    previous: row.previous.toString("hex"),
    hash: row.hash.toString("hex"),
    digest: createHash("sha256").update(row.canonical).digest("hex"),
  };
}

/** Place of the first event of a page with a text that is neither erased nor the one that was hashed. */
async function findBadText(db: Db, rows: readonly query.LedgerRow[]): Promise<number | undefined> {
  const canonicalOf = new Map(rows.map((row) => [row.seq, row.canonical]));
  const texts = await query.listLedgerTexts(db, [...canonicalOf.keys()]);
  return texts.find((text) => text.content !== null && !isTextAsHashed(text, canonicalOf.get(text.seq) ?? "{}"))?.seq;
}

function isTextAsHashed({ name, salt, content }: query.LedgerTextRow, canonical: string): boolean {
  const hash = createHash("sha256")
    .update(Buffer.concat([salt, Buffer.from(content ?? "")]))
    .digest("hex");
  return canonical.includes(`"${name}Sha256":"${hash}"`);
}
