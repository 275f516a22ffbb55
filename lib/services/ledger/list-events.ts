import * as query from "@/db/queries/ledger";
import { FIRST_PREVIOUS, type LedgerContent } from "@/lib/domain/ledger/ledger-event";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { LedgerEntry, LedgerEvent, LedgerQuery } from "@/schemas/api/ledger";

/** An event as it is hashed, with its hash. */
function eventOf(row: query.LedgerRow): LedgerEvent {
  return { ...(JSON.parse(row.canonical) as LedgerContent), hash: row.hash.toString("hex") };
}

async function pageOfRows(ctx: Ctx, filter: LedgerQuery): Promise<Page<query.LedgerRow>> {
  const rows = await query.listLedgerEvents(ctx.db, { ...filter, limit: filter.limit + 1 });
  return pageOf(rows, filter.limit, (row) => String(row.seq));
}

/** Events exactly as they are hashed. */
export async function listEvents(ctx: Ctx, filter: LedgerQuery): Promise<Page<LedgerEvent>> {
  const { items, next } = await pageOfRows(ctx, filter);
  return { items: items.map(eventOf), next };
}

/** Events for people: with the name of who did it and the texts that were not erased. */
export async function listEntries(ctx: Ctx, filter: LedgerQuery): Promise<Page<LedgerEntry>> {
  const { items, next } = await pageOfRows(ctx, filter);
  const names = await query.listActorNames(ctx.db, [...new Set(items.map((row) => row.actor))]);
  const texts = await query.listLedgerTexts(
    ctx.db,
    items.map((row) => row.seq),
  );
  const entries = items.map((row) => ({
    ...eventOf(row),
    actorName: names.get(row.actor) ?? null,
    texts: texts.filter((text) => text.seq === row.seq).map(({ name, content }) => ({ name, content })),
  }));
  return { items: entries, next };
}

/** Where the chain ends; what a release names. */
export async function getHead(ctx: Ctx): Promise<{ seq: number; at: string | null; hash: string }> {
  const [last] = await query.listLedgerEvents(ctx.db, { limit: 1, order: "desc" });
  if (!last) return { seq: 0, at: null, hash: FIRST_PREVIOUS };
  return { seq: last.seq, at: last.at.toISOString(), hash: last.hash.toString("hex") };
}

/**
 * The whole ledger up to its head as it stood when asked for, a line an event, each line the very bytes that were hashed:
 * the SHA-256 of a line is the `previous` of the next one.
 */
export async function openExport(ctx: Ctx): Promise<{ head: string; lines: AsyncGenerator<string> }> {
  const { seq, hash } = await getHead(ctx);
  return { head: hash, lines: linesUntil(ctx, seq) };
}

async function* linesUntil(ctx: Ctx, seq: number): AsyncGenerator<string> {
  for await (const rows of query.eachLedgerEvents(ctx.db, seq)) yield rows.map((row) => `${row.canonical}\n`).join("");
}
