import type { z } from "zod";
import { getFamily, lockFamily } from "@/db/queries/families";
import { findReadingMapping, keepReadingMapping, type ReadingMappingRow } from "@/db/queries/reading-mappings";
import { canonicalJson } from "@/lib/domain/canonical-json";
import type { ReadingMapping } from "@/lib/domain/readings/map-table";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { keptMapping } from "@/schemas/api/reading-mappings";

export type KeptMapping = z.output<typeof keptMapping>;

function viewOf(row: ReadingMappingRow | undefined): KeptMapping {
  if (!row) return { mapping: null, updatedAt: null, updatedBy: null };
  return { mapping: row.mapping, updatedAt: row.updatedAt.toISOString(), updatedBy: row.updatedByName };
}

/** How the tables of a family were read last. @throws AppError `family.not_found` */
export async function getReadingMapping(ctx: Ctx, family: string): Promise<KeptMapping> {
  const { id } = await getFamily(ctx.db, family);
  return viewOf(await findReadingMapping(ctx.db, id));
}

/** Remembers a mapping that was accepted with an upload; the same one again changes nothing. @throws AppError `family.not_found` */
export async function setReadingMapping(ctx: PersonCtx, family: string, mapping: ReadingMapping): Promise<KeptMapping> {
  assertRole(ctx, "engineer");
  const { id, code } = await getFamily(ctx.db, family);
  return ctx.db.transaction().execute(async (trx) => {
    await lockFamily(trx, id);
    const before = await findReadingMapping(trx, id);
    if (before && canonicalJson(before.mapping) === canonicalJson(mapping)) return viewOf(before);
    const updatedAt = ctx.now();
    await keepReadingMapping(trx, { familyId: id, mapping, updatedAt, updatedBy: ctx.actor.id });
    const data = { from: before?.mapping ?? null, to: mapping };
    await appendEvent(ctx, trx, { action: "reading-mapping.changed", subject: code, data });
    return viewOf({ mapping, updatedAt, updatedByName: ctx.actor.name });
  });
}
