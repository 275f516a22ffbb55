import type { Trx } from "@/db/executor";
import { insertApproval } from "@/db/queries/approvals";
import type { FamilyRow } from "@/db/queries/families";
import { type LayoutChange, type LayoutRow, lockLayout, updateLayout } from "@/db/queries/layouts";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import type { Decision } from "@/lib/services/families/decide-family-revision";
import { assertMayTakeBack, assertState } from "@/lib/services/families/publishing";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { confirmIdentity } from "@/lib/services/people/confirm-identity";
import { getValidLayout } from "./lint-document";
import { type LayoutKey, lockFamilyOf } from "./write-layout";

/** Locks family and layout, moves the layout as `move` says, and records it. */
async function moveLayout(
  ctx: PersonCtx,
  key: LayoutKey,
  event: { action: string; reason?: string },
  move: (trx: Trx, layout: LayoutRow, family: FamilyRow) => Promise<LayoutChange>,
): Promise<void> {
  await ctx.db.transaction().execute(async (trx) => {
    const family = await lockFamilyOf(trx, key.family);
    const layout = await lockLayout(trx, family.id, key.version);
    await updateLayout(trx, layout.id, await move(trx, layout, family));
    const data = { family: family.code, version: layout.version, sha256: layout.sha256.toString("hex") };
    await appendEvent(ctx, trx, { action: event.action, subject: layout.id, data, texts: { reason: event.reason } });
  });
}

/**
 * Asks a second person to publish a draft. The rules are asked again, as other versions may have been published meanwhile.
 * @throws AppError `layout.not_found`, `layout.wrong_state`, `layout.unfinished`, `layout.invalid`
 */
export async function submitLayout(ctx: PersonCtx, key: LayoutKey): Promise<void> {
  assertRole(ctx, "engineer");
  await moveLayout(ctx, key, { action: "layout.submitted" }, async (trx, layout, family) => {
    assertState("layout", layout.state, "draft");
    assertFinished(layout);
    const { step } = await getValidLayout(trx, family, layout.document);
    return { state: "in-review", step, submittedAt: ctx.now(), submittedBy: ctx.actor.id };
  });
}

/** What stands in the text is what is asked for, never an older document behind it. @throws AppError `layout.unfinished` */
function assertFinished({ unfinished, version }: LayoutRow): void {
  if (!unfinished) return;
  const message = `The text of draft ${version} has errors still; mend them, then ask again.`;
  throw new AppError("layout.unfinished", { version, message });
}

/** Makes a layout under review a draft again. @throws AppError `layout.wrong_state`, `auth.forbidden` for another person */
export async function takeBackLayout(ctx: PersonCtx, key: LayoutKey): Promise<void> {
  assertRole(ctx, "engineer");
  await moveLayout(ctx, key, { action: "layout.taken-back" }, async (_trx, layout) => {
    assertState("layout", layout.state, "in-review");
    assertMayTakeBack(ctx, layout.submittedBy);
    return { state: "draft", submittedAt: null, submittedBy: null };
  });
}

/**
 * A second person's decision over a layout: published and frozen, or a draft again.
 * @throws AppError `auth.password_wrong`, `layout.self_approval`, `layout.wrong_state`, `layout.invalid` where another
 * version published meanwhile asks for a larger step; nothing is then written.
 */
export async function decideLayout(
  ctx: PersonCtx,
  { family: code, version, ...body }: LayoutKey & Decision,
): Promise<void> {
  assertRole(ctx, "reviewer");
  await confirmIdentity(ctx, body);
  const approved = body.decision === "approve";
  const event = { action: approved ? "layout.published" : "layout.refused", reason: body.reason };
  await moveLayout(ctx, { family: code, version }, event, async (trx, layout, family) => {
    const at = ctx.now();
    const subject = `layout ${version} of family ${family.code}`;
    await insertApproval(trx, {
      id: ctx.newId(),
      subjectKind: "layout",
      subjectId: layout.id,
      decision: body.decision,
      personId: ctx.actor.id,
      personName: ctx.actor.name,
      meaning: approved ? `I checked ${subject} and publish it.` : `I refuse ${subject}.`,
      reason: body.reason ?? null,
      digest: layout.sha256,
      serialCount: null,
      at,
    });
    if (!approved) return { state: "draft", submittedAt: null, submittedBy: null };
    const { step } = await getValidLayout(trx, family, layout.document);
    return { state: "published", step, publishedAt: at };
  });
}

/** Takes a published layout out of use for new packages; what was built from it stays. @throws AppError `layout.wrong_state` */
export async function retireLayout(ctx: PersonCtx, key: LayoutKey & { reason?: string }): Promise<void> {
  assertRole(ctx, "engineer", "reviewer");
  await moveLayout(ctx, key, { action: "layout.retired", reason: key.reason }, async (_trx, layout) => {
    assertState("layout", layout.state, "published");
    return { state: "retired", retiredAt: ctx.now() };
  });
}
