import type { Trx } from "@/db/executor";
import { insertApproval } from "@/db/queries/approvals";
import type { PackageRow } from "@/db/queries/packages";
import {
  finishReinstatement,
  getReinstatement,
  lockReinstatement,
  type ReinstatementRow,
} from "@/db/queries/reinstatements";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { goLive } from "@/lib/services/packages/go-live";
import { packageEventData } from "@/lib/services/packages/package-event";
import { lockLotAndPackage } from "@/lib/services/packages/package-rules";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import { assertNotBlocked, assertSuperseded } from "./reinstatement-blocks";

export interface ReinstatementDecision extends Confirmation {
  id: string;
  decision: "approve" | "refuse";
  /** Needed to refuse. */
  reason?: string | undefined;
}

/**
 * A second person's decision over a request: the earlier release goes live at once, or the request is closed.
 * @throws AppError `auth.password_wrong`, `reinstatement.not_found`, `reinstatement.self_approval`,
 * `reinstatement.wrong_state`, `reinstatement.already_live`, `reinstatement.withdrawn`, `reinstatement.blocked`; nothing is
 * then written
 */
export async function decideReinstatement(ctx: PersonCtx, input: ReinstatementDecision): Promise<void> {
  assertRole(ctx, "reviewer");
  await confirmIdentity(ctx, input);
  const { packageId } = await getReinstatement(ctx.db, input.id);
  await ctx.db.transaction().execute(async (trx) => {
    const pkg = await lockLotAndPackage(trx, packageId);
    const request = await lockReinstatement(trx, input.id);
    assertMayDecide(ctx, request);
    if (input.decision === "refuse") return refuse(ctx, trx, { request, pkg, input });
    assertSuperseded(pkg);
    await assertNotBlocked(trx, pkg);
    await sign(ctx, trx, { request, pkg, input });
    await goLive(ctx, trx, pkg, { kind: "reinstatement", reason: request.reason, reinstatementId: request.id });
    await finishReinstatement(trx, request.id, "done", ctx.now());
  });
}

interface Decided {
  request: ReinstatementRow;
  pkg: PackageRow;
  input: ReinstatementDecision;
}

function assertMayDecide(ctx: PersonCtx, request: ReinstatementRow): void {
  if (request.askedBy === ctx.actor.id) {
    const message = "You asked for this; another reviewer has to decide.";
    throw new AppError("reinstatement.self_approval", { message });
  }
  if (request.state !== "asked") {
    const message = `This request was ${request.state === "done" ? "granted" : "refused"} before.`;
    throw new AppError("reinstatement.wrong_state", { state: request.state, message });
  }
}

async function sign(ctx: PersonCtx, trx: Trx, { request, pkg, input }: Decided): Promise<void> {
  const subject = `package ${pkg.version} of lot ${pkg.lotCode}`;
  await insertApproval(trx, {
    id: ctx.newId(),
    subjectKind: "reinstatement",
    subjectId: request.id,
    decision: input.decision,
    personId: ctx.actor.id,
    personName: ctx.actor.name,
    meaning:
      input.decision === "approve"
        ? `I agree that ${subject} goes live again.`
        : `I refuse to make ${subject} live again.`,
    reason: input.reason ?? null,
    digest: null,
    serialCount: null,
    at: ctx.now(),
  });
}

async function refuse(ctx: PersonCtx, trx: Trx, decided: Decided): Promise<void> {
  const { request, pkg, input } = decided;
  await sign(ctx, trx, decided);
  await finishReinstatement(trx, request.id, "refused", ctx.now());
  await appendEvent(ctx, trx, {
    action: "reinstatement.refused",
    subject: request.id,
    data: packageEventData(pkg, { package: pkg.id }),
    texts: { reason: input.reason },
  });
}
