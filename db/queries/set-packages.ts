import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** A package with images from the coefficients of one derivation. */
export interface SetPackageRow {
  id: string;
  version: string;
  state: string;
  /** Images of it that carry them. */
  devices: number;
}

/** Packages with images from a derivation's coefficients, newest first. */
export async function listPackagesOfDerivation(db: Db, derivationId: string): Promise<SetPackageRow[]> {
  const { rows } = await sql<SetPackageRow>`
    select k.id, k.version, k.state, count(*)::int as devices
    from coefficient_set c join image i on i.coefficient_set_id = c.id join package k on k.id = i.package_id
    where c.derivation_id = ${derivationId}::uuid
    group by k.id order by k.id desc
  `.execute(db);
  return rows;
}
