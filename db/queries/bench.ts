import { sql } from "kysely";
import type { Db } from "@/db/executor";

export interface BenchLotRow {
  lot: string;
  family: string;
  sequence: number;
  packageId: string | null;
  version: string | null;
  digest: Buffer | null;
  devices: number;
  held: number;
}

/** Lots that ever had something live, with what is live now, by code; one of them where a code is given. */
export function listBenchLots(db: Db, code?: string): Promise<BenchLotRow[]> {
  let query = db
    .selectFrom("lot")
    .innerJoin("family", "family.id", "lot.familyId")
    .leftJoin("package", (join) => join.onRef("package.lotId", "=", "lot.id").on("package.state", "=", "live"))
    .select(["lot.code as lot", "family.code as family", "lot.sequence"])
    .select(["package.id as packageId", "package.version", "package.digest"])
    .select([
      sql<number>`(select count(*)::int from image where image.package_id = package.id)`.as("devices"),
      sql<number>`(select count(*)::int from device where device.lot_id = lot.id and device.held)`.as("held"),
    ])
    .where("lot.sequence", ">", 0)
    .orderBy("lot.code");
  if (code !== undefined) query = query.where("lot.code", "=", code);
  return query.execute();
}
