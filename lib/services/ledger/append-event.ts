import { createHash, randomBytes } from "node:crypto";
import type { Trx } from "@/db/executor";
import { insertLedgerEvent, insertLedgerTexts, lockLedgerHead } from "@/db/queries/ledger";
import { canonicalEvent, FIRST_PREVIOUS } from "@/lib/domain/ledger/ledger-event";
import { actorKey, type Ctx } from "@/lib/services/context";

export interface NewEvent {
  /** `noun.verb` in the past tense, such as `package.approved`. */
  action: string;
  /** Code or id of what it happened to. */
  subject: string;
  data?: Record<string, unknown>;
  /** Personal or free text (reasons, names): kept in an erasable table, only its salted hash enters the chain. */
  texts?: Record<string, string | null | undefined>;
}

const sha256 = (text: string | Buffer) => createHash("sha256").update(text).digest();

/**
 * Appends one event to the ledger, in the caller's transaction and as its last statement: the chain's lock is held until commit.
 * @returns the event's place and its hash in lower-case hex.
 */
export async function appendEvent(ctx: Ctx, trx: Trx, event: NewEvent): Promise<{ seq: number; hash: string }> {
  const texts = Object.entries(event.texts ?? {})
    .filter((entry): entry is [string, string] => typeof entry[1] === "string" && entry[1] !== "")
    .map(([name, content]) => ({ name, content, salt: randomBytes(16) }));
  const textHashes = Object.fromEntries(
    texts.map(({ name, content, salt }) => [
      `${name}Sha256`,
      sha256(Buffer.concat([salt, Buffer.from(content)])).toString("hex"),
    ]),
  );
  const head = await lockLedgerHead(trx);
  const seq = (head?.seq ?? 0) + 1;
  const at = ctx.now();
  const actor = actorKey(ctx.actor);
  const { action, subject } = event;
  const data = { ...event.data, ...textHashes };
  const previous = head?.hash.toString("hex") ?? FIRST_PREVIOUS;
  const canonical = canonicalEvent({ seq, at: at.toISOString(), actor, action, subject, data, previous });
  const hash = sha256(canonical);
  await insertLedgerEvent(trx, {
    seq,
    at,
    actor,
    action,
    subject,
    canonical,
    previous: Buffer.from(previous, "hex"),
    hash,
  });
  await insertLedgerTexts(
    trx,
    texts.map((text) => ({ seq, ...text })),
  );
  return { seq, hash: hash.toString("hex") };
}
