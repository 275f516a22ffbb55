import type { Selectable } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { Equipment } from "@/db/generated/types.generated";
import { isUuid } from "@/db/queries/code-or-id";
import { AppError } from "@/lib/errors";

export type EquipmentKind = "sensor" | "chamber" | "load" | "reader";

/** One place of a chamber: deviation from the reference sensor and its expanded uncertainty, both in K. */
export interface ChamberPositionRow {
  position: string;
  deviationK: number;
  uncertaintyK: number;
}

export interface EquipmentRow {
  id: string;
  code: string;
  kind: EquipmentKind;
  certificate: string;
  /** `YYYY-MM-DD`, last day of validity. */
  calibratedUntil: string;
  /** Expanded uncertainty of the certificate in the kind's unit: °C, °C, kg, mV/V. */
  uncertainty: number;
  /** k of the certificate's expanded uncertainties. */
  coverageFactor: number;
  positions: ChamberPositionRow[];
  createdAt: Date;
  createdBy: string;
  updatedAt: Date;
}

const equipmentColumns = [
  "id",
  "code",
  "kind",
  "certificate",
  "calibratedUntil",
  "uncertainty",
  "coverageFactor",
  "positions",
  "createdAt",
  "createdBy",
  "updatedAt",
] as const;

/** The driver is told to leave dates as text (they have no time zone); the generated type calls them Date. */
function rowOf(row: Pick<Selectable<Equipment>, (typeof equipmentColumns)[number]>): EquipmentRow {
  const { kind, calibratedUntil, positions } = row;
  return {
    ...row,
    kind: kind as EquipmentKind,
    calibratedUntil: calibratedUntil as unknown as string,
    positions: positions as unknown as ChamberPositionRow[],
  };
}

/** Equipment by code. */
export async function listEquipment(
  db: Db,
  { after, limit }: { after?: string; limit: number },
): Promise<EquipmentRow[]> {
  const rows = await db
    .selectFrom("equipment")
    .select(equipmentColumns)
    .$if(after !== undefined, (query) => query.where("code", ">", after as string))
    .orderBy("code")
    .limit(limit)
    .execute();
  return rows.map(rowOf);
}

const notFound = (equipment: string) =>
  new AppError("equipment.not_found", { equipment, message: `There is no equipment ${equipment}.` });

function selectOne(db: Db, codeOrId: string) {
  return db
    .selectFrom("equipment")
    .select(equipmentColumns)
    .where(isUuid(codeOrId) ? "id" : "code", "=", isUuid(codeOrId) ? codeOrId : codeOrId.trim().toUpperCase());
}

/** A piece of equipment by its code (any case) or UUID. @throws AppError `equipment.not_found` */
export async function getEquipment(db: Db, codeOrId: string): Promise<EquipmentRow> {
  return rowOf(await selectOne(db, codeOrId).executeTakeFirstOrThrow(() => notFound(codeOrId)));
}

/** A piece of equipment, locked until commit. @throws AppError `equipment.not_found` */
export async function lockEquipment(trx: Trx, codeOrId: string): Promise<EquipmentRow> {
  return rowOf(
    await selectOne(trx, codeOrId)
      .forUpdate()
      .executeTakeFirstOrThrow(() => notFound(codeOrId)),
  );
}

/** @throws constraint `equipment_code_unique` → `equipment.exists` */
export async function insertEquipment(trx: Trx, row: EquipmentRow): Promise<void> {
  await trx
    .insertInto("equipment")
    .values({ ...row, positions: JSON.stringify(row.positions) })
    .execute();
}

export type EquipmentChange = Partial<
  Pick<EquipmentRow, "certificate" | "calibratedUntil" | "uncertainty" | "coverageFactor" | "positions">
>;

export async function updateEquipment(
  trx: Trx,
  id: string,
  { positions, ...change }: EquipmentChange & { updatedAt: Date },
): Promise<void> {
  await trx
    .updateTable("equipment")
    .set({ ...change, ...(positions && { positions: JSON.stringify(positions) }) })
    .where("id", "=", id)
    .execute();
}
