import { sql } from "kysely";
import type { Db } from "@/db/executor";

export interface FoundDevice {
  serial: string;
  lot: string;
  family: string;
}

/** Devices whose serial contains the text, the very one first, then those that begin with it. @param text upper case. */
export async function searchDevices(db: Db, text: string, limit: number): Promise<FoundDevice[]> {
  const { rows } = await sql<FoundDevice>`
    select d.serial, l.code as lot, f.code as family
    from device d join lot l on l.id = d.lot_id join family f on f.id = l.family_id
    where position(${text} in d.serial) > 0
    order by d.serial <> ${text}, not starts_with(d.serial, ${text}), d.serial limit ${limit}
  `.execute(db);
  return rows;
}

export interface FoundCode {
  code: string;
  detail: string;
}

/** Lots whose code contains the text, the very one first. @param text upper case. */
export async function searchLots(db: Db, text: string, limit: number): Promise<FoundCode[]> {
  const { rows } = await sql<FoundCode>`
    select l.code, f.code as detail from lot l join family f on f.id = l.family_id
    where position(${text} in l.code) > 0
    order by l.code <> ${text}, not starts_with(l.code, ${text}), l.code limit ${limit}
  `.execute(db);
  return rows;
}

/** Families whose code or name contains the text, the very code first. @param text upper case. */
export async function searchFamilies(db: Db, text: string, limit: number): Promise<FoundCode[]> {
  const { rows } = await sql<FoundCode>`
    select f.code, r.document ->> 'name' as detail from family f
    cross join lateral (select document from family_revision v where v.family_id = f.id order by v.number desc limit 1) r
    where position(${text} in f.code) > 0 or position(${text} in upper(r.document ->> 'name')) > 0
    order by f.code <> ${text}, f.code limit ${limit}
  `.execute(db);
  return rows;
}

export interface FoundPackage {
  id: string;
  lot: string;
  version: string;
  state: string;
}

export interface PackageSearch {
  /** A lot's code or its beginning. */
  lot?: string;
  version?: string;
  /** Lower-case hex digits that the digest begins with, an even number of them or not. */
  digest?: string;
  limit: number;
  /** Leaves out what was never released. */
  releasedOnly: boolean;
}

/** Packages by what is given, live ones first, then the newest. */
export async function searchPackages(db: Db, wanted: PackageSearch): Promise<FoundPackage[]> {
  const { lot = null, version = null, digest = null, limit, releasedOnly } = wanted;
  const { rows } = await sql<FoundPackage>`
    select k.id, l.code as lot, k.version, k.state from package k join lot l on l.id = k.lot_id
    where (${lot}::text is null or starts_with(l.code, ${lot}))
      and (${version}::text is null or k.version = ${version})
      and (${digest}::text is null or starts_with(encode(k.digest, 'hex'), ${digest}))
      and (not ${releasedOnly}::boolean or k.state in ('live', 'superseded'))
    order by k.state <> 'live', k.id desc limit ${limit}
  `.execute(db);
  return rows;
}
