import { insertApproval } from "@/db/queries/approvals";
import { getFamily, lockFamilyRevision, updateFamilyRevision } from "@/db/queries/families";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { confirmIdentity } from "@/lib/services/people/confirm-identity";
import { assertMayTakeBack, assertState } from "./publishing";

export interface RevisionKey {
  family: string;
  number: number;
}

/** Asks a second person to publish a draft. @throws AppError `family-revision.not_found`, `family.wrong_state` */
export async function submitFamilyRevision(ctx: PersonCtx, key: RevisionKey): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const family = await getFamily(trx, key.family);
    const revision = await lockFamilyRevision(trx, family.id, key.number);
    assertState("family", revision.state, "draft");
    await updateFamilyRevision(trx, revision.id, {
      state: "in-review",
      submittedAt: ctx.now(),
      submittedBy: ctx.actor.id,
    });
    const data = { revision: key.number, sha256: revision.sha256.toString("hex") };
    await appendEvent(ctx, trx, { action: "revision.submitted", subject: family.code, data });
  });
}

/** Makes a revision under review a draft again. @throws AppError `family.wrong_state`, `auth.forbidden` for another person */
export async function takeBackFamilyRevision(ctx: PersonCtx, key: RevisionKey): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const family = await getFamily(trx, key.family);
    const revision = await lockFamilyRevision(trx, family.id, key.number);
    assertState("family", revision.state, "in-review");
    assertMayTakeBack(ctx, revision.submittedBy);
    await updateFamilyRevision(trx, revision.id, { state: "draft", submittedAt: null, submittedBy: null });
    await appendEvent(ctx, trx, {
      action: "revision.taken-back",
      subject: family.code,
      data: { revision: key.number },
    });
  });
}

export interface Decision {
  decision: "approve" | "refuse";
  reason?: string;
  password: string;
  oneTimeCode?: string;
}

/**
 * A second person's decision over a revision: published, or a draft again.
 * @throws AppError `auth.password_wrong`, `family.self_approval`, `family.wrong_state`; nothing is then written.
 */
export async function decideFamilyRevision(
  ctx: PersonCtx,
  { family: code, number, ...body }: RevisionKey & Decision,
): Promise<void> {
  assertRole(ctx, "reviewer");
  await confirmIdentity(ctx, body);
  await ctx.db.transaction().execute(async (trx) => {
    const family = await getFamily(trx, code);
    const revision = await lockFamilyRevision(trx, family.id, number);
    const approved = body.decision === "approve";
    const at = ctx.now();
    const subject = `revision ${number} of family ${family.code}`;
    await insertApproval(trx, {
      id: ctx.newId(),
      subjectKind: "family-revision",
      subjectId: revision.id,
      decision: body.decision,
      personId: ctx.actor.id,
      personName: ctx.actor.name,
      meaning: approved ? `I checked ${subject} and publish its values.` : `I refuse ${subject}.`,
      reason: body.reason ?? null,
      digest: revision.sha256,
      serialCount: null,
      at,
    });
    const change = approved
      ? ({ state: "published", publishedAt: at } as const)
      : ({ state: "draft", submittedAt: null, submittedBy: null } as const);
    await updateFamilyRevision(trx, revision.id, change);
    await appendEvent(ctx, trx, {
      action: approved ? "revision.published" : "revision.refused",
      subject: family.code,
      data: { revision: number, sha256: revision.sha256.toString("hex") },
      texts: { reason: body.reason },
    });
  });
}
