import type { Db } from "@/db/executor";
import type { ChamberPositionRow } from "@/db/queries/equipment";

/** A run that used a piece of equipment, with its certificate as it stood then. */
export interface EquipmentUseRow {
  runId: string;
  lot: string;
  purpose: string;
  createdAt: Date;
  deviceCount: number;
  counted: boolean;
  certificate: string;
  /** `YYYY-MM-DD` */
  calibratedUntil: string;
  uncertainty: number;
  coverageFactor: number;
  positions: ChamberPositionRow[];
}

/** Runs that used a piece of equipment, newest first. */
export async function listRunsOfEquipment(
  db: Db,
  equipmentId: string,
  page: { before?: string; limit: number },
): Promise<EquipmentUseRow[]> {
  let query = db
    .selectFrom("runEquipment")
    .innerJoin("run", "run.id", "runEquipment.runId")
    .innerJoin("lot", "lot.id", "run.lotId")
    .leftJoin("run as later", "later.supersedesId", "run.id")
    .select([
      "run.id as runId",
      "lot.code as lot",
      "run.purpose",
      "run.createdAt",
      "run.deviceCount",
      "later.id as laterId",
      "runEquipment.certificate",
      "runEquipment.calibratedUntil",
      "runEquipment.uncertainty",
      "runEquipment.coverageFactor",
      "runEquipment.positions",
    ])
    .where("runEquipment.equipmentId", "=", equipmentId)
    .orderBy("run.id", "desc")
    .limit(page.limit);
  if (page.before !== undefined) query = query.where("run.id", "<", page.before);
  const rows = await query.execute();
  return rows.map(({ laterId, positions, ...row }) => ({
    ...row,
    counted: laterId === null,
    positions: positions as unknown as ChamberPositionRow[],
  }));
}
