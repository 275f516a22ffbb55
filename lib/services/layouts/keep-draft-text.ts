import type { z } from "zod";
import type { Trx } from "@/db/executor";
import type { FamilyRow } from "@/db/queries/families";
import { type LayoutChange, type LayoutRow, lockLayout, updateLayout } from "@/db/queries/layouts";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { documentDigest } from "@/lib/services/families/document-digest";
import { assertState } from "@/lib/services/families/publishing";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { keptText } from "@/schemas/api/layouts";
import { lintForFamily } from "./lint-document";
import { addWriter, assertSameDraft, type LayoutKey, lockFamilyOf } from "./write-layout";

/**
 * Keeps what an author has typed into a draft, finished or not. Free of errors it becomes the draft's document; with errors
 * the last document without them stays and the draft counts as unfinished. The ledger names each writer once; what the
 * typing led to is recorded when publishing is asked for.
 * @param input.draft the number of the draft that was edited.
 * @throws AppError `layout.not_found`, `layout.wrong_state`, `layout.draft_changed`, `request.invalid` for a NUL character
 */
export async function keepDraftText(
  ctx: PersonCtx,
  input: LayoutKey & { source: string; draft: number },
): Promise<z.input<typeof keptText>> {
  assertRole(ctx, "engineer");
  assertStorable(input.source);
  return ctx.db.transaction().execute(async (trx) => {
    const family = await lockFamilyOf(trx, input.family);
    const before = await lockLayout(trx, family.id, input.version);
    assertState("layout", before.state, "draft");
    await assertSameDraft(trx, before, input.draft);
    if (input.source === before.source) return replyOf(ctx, before);
    const judged = await judge(trx, family, before, input.source);
    const stamp = { draftNumber: before.draftNumber + 1, updatedAt: ctx.now(), updatedBy: ctx.actor.id };
    const change: LayoutChange = { ...judged, ...stamp, source: input.source };
    await updateLayout(trx, before.id, change);
    const after = { ...before, ...change };
    if (await addWriter(ctx, trx, before.id)) await recordWriter(ctx, trx, family, after);
    return replyOf(ctx, after);
  });
}

/** PostgreSQL has no NUL in texts. @throws AppError `request.invalid` */
function assertStorable(source: string): void {
  if (!source.includes("\0")) return;
  throw new AppError("request.invalid", {
    message: "The text holds a NUL character, which can't be stored; take it out.",
  });
}

async function judge(trx: Trx, family: FamilyRow, before: LayoutRow, source: string): Promise<LayoutChange> {
  const { layout, errors, step } = await lintForFamily(trx, family, parse(source), {
    draftVersion: before.version,
  });
  if (!layout || errors.length > 0) return { unfinished: true };
  return { document: layout, sha256: documentDigest(layout), step, unfinished: false };
}

function parse(source: string): unknown {
  try {
    return JSON.parse(source);
  } catch {
    return undefined; // half a thought; it is kept all the same
  }
}

async function recordWriter(ctx: PersonCtx, trx: Trx, family: FamilyRow, { id, ...layout }: LayoutRow): Promise<void> {
  const { version, draftNumber: draft, step, sha256 } = layout;
  const data = { family: family.code, version, draft, step, sha256: sha256.toString("hex") };
  await appendEvent(ctx, trx, { action: "layout.saved", subject: id, data });
}

function replyOf(ctx: PersonCtx, layout: LayoutRow): z.input<typeof keptText> {
  const { draftNumber: draft, unfinished, updatedAt } = layout;
  return {
    draft,
    unfinished,
    sha256: layout.sha256.toString("hex"),
    updatedAt: updatedAt.toISOString(),
    now: ctx.now().toISOString(),
  };
}
