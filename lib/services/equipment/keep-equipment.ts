import type { z } from "zod";
import * as query from "@/db/queries/equipment";
import { AppError } from "@/lib/errors";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Page, pageOf } from "@/lib/services/page";
import type { EquipmentChange, equipment, NewEquipment } from "@/schemas/api/equipment";

export type EquipmentView = z.output<typeof equipment>;

function viewOf(row: query.EquipmentRow): EquipmentView {
  const { createdBy: _, createdAt, updatedAt, ...values } = row;
  return { ...values, createdAt: createdAt.toISOString(), updatedAt: updatedAt.toISOString() };
}

/** Equipment by code. */
export async function listEquipment(ctx: Ctx, page: { limit: number; cursor?: string }): Promise<Page<EquipmentView>> {
  const rows = await query.listEquipment(ctx.db, { limit: page.limit + 1, after: page.cursor });
  return pageOf(rows.map(viewOf), page.limit, (row) => row.code);
}

/** A piece of equipment. @throws AppError `equipment.not_found` */
export async function getEquipment(ctx: Ctx, codeOrId: string): Promise<EquipmentView> {
  return viewOf(await query.getEquipment(ctx.db, codeOrId));
}

/** Adds a piece of equipment. @throws AppError `equipment.exists`, `auth.forbidden` */
export async function addEquipment(ctx: PersonCtx, input: NewEquipment): Promise<EquipmentView> {
  assertRole(ctx, "engineer");
  return ctx.db.transaction().execute(async (trx) => {
    const at = ctx.now();
    const row = { ...input, id: ctx.newId(), createdAt: at, createdBy: ctx.actor.id, updatedAt: at };
    await query.insertEquipment(trx, row);
    await appendEvent(ctx, trx, { action: "equipment.added", subject: input.code, data: { ...input } });
    return viewOf(row);
  });
}

/**
 * Changes a certificate, its date, uncertainty or a chamber's places. Runs uploaded before keep the values of their day.
 * @throws AppError `equipment.not_found`, `equipment.not_a_chamber`, `auth.forbidden`
 */
export async function changeEquipment(ctx: PersonCtx, code: string, change: EquipmentChange): Promise<EquipmentView> {
  assertRole(ctx, "engineer");
  return ctx.db.transaction().execute(async (trx) => {
    const before = await query.lockEquipment(trx, code);
    if (before.kind !== "chamber" && change.positions?.length) {
      throw new AppError("equipment.not_a_chamber", { kind: before.kind, message: "Only a chamber has places." });
    }
    const updatedAt = ctx.now();
    await query.updateEquipment(trx, before.id, { ...change, updatedAt });
    const { certificate, calibratedUntil, uncertainty, coverageFactor, positions } = before;
    const data = { from: { certificate, calibratedUntil, uncertainty, coverageFactor, positions }, to: { ...change } };
    await appendEvent(ctx, trx, { action: "equipment.changed", subject: before.code, data });
    return viewOf({ ...before, ...change, updatedAt });
  });
}
