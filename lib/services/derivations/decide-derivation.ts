import type { Trx } from "@/db/executor";
import { insertApproval } from "@/db/queries/approvals";
import { countSetStates, lockSetStates, updateSetStates } from "@/db/queries/coefficients";
import {
  type DerivationRow,
  insertAcknowledgements,
  listAcknowledgements,
  listDerivationFindings,
  lockDerivation,
  updateDerivationState,
} from "@/db/queries/derivations";
import { listMakers } from "@/db/queries/makers";
import {
  assertAcknowledged,
  assertNoHardFinding,
  chooseSets,
  type DecidedSet,
  findingsInReach,
  resolveAcknowledgements,
  stateBySets,
} from "@/lib/domain/approval/derivation-decision";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { confirmIdentity } from "@/lib/services/people/confirm-identity";
import type { DerivationDecisionBody, DerivationView } from "@/schemas/api/derivations";
import { getDerivationView } from "./get-derivation";
import { tellAuthors } from "./tell-people";

type Input = DerivationDecisionBody & { id: string };

const DONE = { approve: "approved", refuse: "refused", revoke: "revoked" } as const;

/** What the signature means, as the person sees it before signing. */
export function meaningOf(decision: Input["decision"], devices: number): string {
  const of = `the coefficients of ${devices === 1 ? "one device" : `${devices.toLocaleString("en")} devices`}`;
  if (decision === "approve") return `I have looked at readings, residuals and findings and approve ${of}.`;
  return decision === "refuse" ? `I refuse ${of}.` : `I revoke the approval of ${of}.`;
}

/**
 * Approves, refuses or revokes coefficients of a derivation, all of them or those of some devices.
 * @throws AppError `auth.password_wrong`, `derivation.not_found`, `derivation.running`, `derivation.wrong_state`,
 * `derivation.self_approval`, `derivation.serial_unknown`, `derivation.hard_finding`, `derivation.not_acknowledged`,
 * `derivation.finding_unknown`; nothing is then written
 */
export async function decideDerivation(ctx: PersonCtx, input: Input): Promise<DerivationView> {
  assertRole(ctx, "reviewer");
  await confirmIdentity(ctx, { password: input.password, oneTimeCode: input.oneTimeCode });
  await ctx.db.transaction().execute(async (trx) => {
    const derivation = await lockDerivation(trx, input.id);
    await assertNoMaker(ctx, trx, derivation);
    assertOpen(derivation);
    const sets = await lockSetStates(trx, derivation.id);
    const acknowledge =
      input.decision === "approve" ? await checkFindings(trx, input, sets) : new Map<string, string>();
    const chosen = chooseSets(sets, input.decision, input.serials);
    await record(ctx, trx, { derivation, input, chosen, acknowledge });
  });
  return getDerivationView(ctx, input.id);
}

async function assertNoMaker(ctx: PersonCtx, trx: Trx, { id }: DerivationRow): Promise<void> {
  const own = (await listMakers(trx, "derivation", id)).find((maker) => maker.personId === ctx.actor.id);
  if (!own) return;
  const message = `You ${own.act} for this derivation; a second person has to decide on it.`;
  throw new AppError("derivation.self_approval", { act: own.act, message });
}

function assertOpen({ state }: DerivationRow): void {
  if (state === "working")
    throw new AppError("derivation.running", { message: "The derivation is still being computed." });
  if (state === "failed" || state === "refused") {
    throw new AppError("derivation.wrong_state", {
      state,
      message: `This derivation ${state === "failed" ? "has failed" : "was refused"}; derive anew.`,
    });
  }
}

/** @returns reasons by finding of what is accepted with this approval. */
async function checkFindings(trx: Trx, input: Input, sets: readonly DecidedSet[]): Promise<Map<string, string>> {
  const findings = await listDerivationFindings(trx, input.id);
  const inReach = findingsInReach(findings, sets, input.serials);
  assertNoHardFinding(inReach);
  const now = resolveAcknowledgements(findings, inReach, input.acknowledge);
  const earlier = (await listAcknowledgements(trx, input.id)).map((one) => one.findingId);
  assertAcknowledged(inReach, new Set([...now.keys(), ...earlier]));
  return now;
}

interface Decided {
  derivation: DerivationRow;
  input: Input;
  chosen: readonly DecidedSet[];
  acknowledge: ReadonlyMap<string, string>;
}

async function record(ctx: PersonCtx, trx: Trx, { derivation, input, chosen, acknowledge }: Decided): Promise<void> {
  const { decision } = input;
  const partial = input.serials !== undefined;
  const approvalId = ctx.newId();
  const at = ctx.now();
  await insertApproval(trx, {
    id: approvalId,
    subjectKind: "derivation",
    subjectId: derivation.id,
    decision,
    personId: ctx.actor.id,
    personName: ctx.actor.name,
    meaning: meaningOf(decision, chosen.length),
    reason: input.reason ?? null,
    digest: derivation.sha256,
    serialCount: partial ? chosen.length : null,
    at,
  });
  const accepted = [...acknowledge].map(([findingId, reason]) => ({ id: ctx.newId(), findingId, reason }));
  const under = { derivationId: derivation.id, approvalId, personId: ctx.actor.id, at };
  await insertAcknowledgements(
    trx,
    accepted.map((one) => ({ ...one, ...under })),
  );
  await updateSetStates(
    trx,
    chosen.map((set) => set.id),
    DONE[decision],
    at,
  );
  const state = stateBySets(await countSetStates(trx, derivation.id));
  if (state !== undefined && state !== derivation.state) await updateDerivationState(trx, derivation.id, state);
  if (decision !== "approve")
    await tellAuthors(ctx, trx, derivation, { decision, devices: chosen.length, reason: input.reason ?? "" });
  await appendEvent(ctx, trx, {
    action: `coefficients.${DONE[decision]}`,
    subject: derivation.id,
    data: {
      lot: derivation.lotCode,
      sha256: derivation.sha256.toString("hex"),
      devices: chosen.length,
      ...(partial && { serials: chosen.map((set) => set.serial) }),
      ...(accepted.length > 0 && { acknowledged: accepted.map((one) => one.findingId) }),
    },
    texts: {
      reason: input.reason,
      acknowledgements: accepted.length > 0 ? JSON.stringify(Object.fromEntries(acknowledge)) : null,
    },
  });
}
