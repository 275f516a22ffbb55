import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import { isUuid } from "@/db/queries/code-or-id";
import { AppError } from "@/lib/errors";

export interface LotRow {
  id: string;
  code: string;
  familyId: string;
  familyCode: string;
  familyRevisionId: string;
  revisionNumber: number;
  /** Version of the firmware that the lot's devices run. */
  firmware: string;
  /** Place of the newest change of what is live; 0 before the first release. */
  sequence: number;
  createdAt: Date;
  createdBy: string;
}

function selectLot(db: Db) {
  return db
    .selectFrom("lot")
    .innerJoin("family", "family.id", "lot.familyId")
    .innerJoin("familyRevision", "familyRevision.id", "lot.familyRevisionId")
    .select([
      "lot.id",
      "lot.code",
      "lot.familyId",
      "family.code as familyCode",
      "lot.familyRevisionId",
      "familyRevision.number as revisionNumber",
      "lot.firmware",
      "lot.sequence",
      "lot.createdAt",
      "lot.createdBy",
    ]);
}

const notFound = (lot: string) => new AppError("lot.not_found", { lot, message: `There is no lot ${lot}.` });

/** A lot by its code (any case) or UUID. @throws AppError `lot.not_found` */
export async function getLot(db: Db, codeOrId: string): Promise<LotRow> {
  const value = isUuid(codeOrId) ? codeOrId : codeOrId.trim().toUpperCase();
  return selectLot(db)
    .where(isUuid(codeOrId) ? "lot.id" : "lot.code", "=", value)
    .executeTakeFirstOrThrow(() => notFound(codeOrId));
}

/** A lot, its row locked until commit. @throws AppError `lot.not_found` */
export async function lockLot(trx: Trx, id: string): Promise<LotRow> {
  return selectLot(trx)
    .where("lot.id", "=", id)
    .forUpdate("lot")
    .executeTakeFirstOrThrow(() => notFound(id));
}

export type NewLot = Pick<
  LotRow,
  "id" | "code" | "familyId" | "familyRevisionId" | "firmware" | "createdAt" | "createdBy"
>;

/** Adds a lot. @throws constraint `lot_code_unique` → `lot.exists` */
export async function insertLot(trx: Trx, lot: NewLot): Promise<void> {
  await trx.insertInto("lot").values(lot).execute();
}

/**
 * How far a lot has come, by the furthest thing in it: planned (serials at most), reading (runs), derived (a derivation),
 * building (a package in the making), in-review, approved, live.
 */
export const LOT_STATES = ["planned", "reading", "derived", "building", "in-review", "approved", "live"] as const;
export type LotState = (typeof LOT_STATES)[number];

const lotState = sql<LotState>`case
  when exists (select 1 from package p where p.lot_id = lot.id and p.state = 'live') then 'live'
  when exists (select 1 from package p where p.lot_id = lot.id and p.state = 'approved') then 'approved'
  when exists (select 1 from package p where p.lot_id = lot.id and p.state = 'in-review') then 'in-review'
  when exists (select 1 from package p where p.lot_id = lot.id and p.state in ('building','draft')) then 'building'
  when exists (select 1 from derivation d where d.lot_id = lot.id and d.state <> 'failed') then 'derived'
  when exists (select 1 from run r where r.lot_id = lot.id) then 'reading'
  else 'planned' end`;

export interface LotSummaryRow extends LotRow {
  createdByName: string;
  state: LotState;
  devices: number;
}

export interface LotFilter {
  familyId?: string;
  /** Part of the lot's code, any case. */
  q?: string;
  state?: LotState;
  id?: string;
  before?: string;
  limit: number;
}

/** Lots with their state and number of devices, newest first. */
export async function listLots(db: Db, filter: LotFilter): Promise<LotSummaryRow[]> {
  const { familyId, q, state, id, before, limit } = filter;
  let query = selectLot(db)
    .innerJoin("person", "person.id", "lot.createdBy")
    .select(["person.name as createdByName", lotState.as("state")])
    .select((eb) =>
      eb
        .selectFrom("device")
        .select(sql<number>`count(*)::int`.as("count"))
        .whereRef("device.lotId", "=", "lot.id")
        .as("devices"),
    )
    .orderBy("lot.id", "desc")
    .limit(limit);
  if (familyId !== undefined) query = query.where("lot.familyId", "=", familyId);
  if (q !== undefined) query = query.where(sql<boolean>`position(${q.trim().toUpperCase()} in lot.code) > 0`);
  if (state !== undefined) query = query.where(lotState, "=", state);
  if (id !== undefined) query = query.where("lot.id", "=", id);
  if (before !== undefined) query = query.where("lot.id", "<", before);
  const rows = await query.execute();
  return rows.map((row) => ({ ...row, devices: row.devices ?? 0 }));
}
