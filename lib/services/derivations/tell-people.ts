import type { Trx } from "@/db/executor";
import type { DerivationRow } from "@/db/queries/derivations";
import { listAuthors, listDeciders } from "@/db/queries/mailed-people";
import {
  coefficientsProposedMessage,
  coefficientsRefusedMessage,
  coefficientsRevokedMessage,
} from "@/lib/mail/derivation-messages";
import type { Ctx, PersonCtx } from "@/lib/services/context";
import { queueMail } from "@/lib/services/mail/queue-mail";

/**
 * Tells the reviewers who may decide that coefficients wait. Nobody is written to where nothing can be approved: no device
 * got values, or a finding of the whole lot blocks.
 */
export async function tellDeciders(
  ctx: Ctx,
  trx: Trx,
  derivation: Pick<DerivationRow, "id" | "lotCode" | "createdByName">,
  proposed: { devices: number; toAcknowledge: number; blocked: boolean },
): Promise<void> {
  if (proposed.devices === 0 || proposed.blocked) return;
  const { id, lotCode: lot, createdByName: by } = derivation;
  const { devices, toAcknowledge } = proposed;
  for (const person of await listDeciders(trx, "derivation", id)) {
    const message = coefficientsProposedMessage({ to: person.name, id, lot, devices, by, toAcknowledge });
    await queueMail(ctx, trx, person, message);
  }
}

/** Tells those who made them that coefficients were refused or an approval was revoked, with the reason. */
export async function tellAuthors(
  ctx: PersonCtx,
  trx: Trx,
  { id, lotCode: lot }: Pick<DerivationRow, "id" | "lotCode">,
  decided: { decision: "refuse" | "revoke"; devices: number; reason: string },
): Promise<void> {
  const messageOf = decided.decision === "refuse" ? coefficientsRefusedMessage : coefficientsRevokedMessage;
  const { devices, reason } = decided;
  for (const person of await listAuthors(trx, id)) {
    const message = messageOf({ to: person.name, id, lot, devices, reason, by: ctx.actor.name });
    await queueMail(ctx, trx, person, message);
  }
}
