import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** Runs that measured a device, newest first, with their temperatures. */
export function listRunsOfDevice(db: Db, deviceId: string) {
  return db
    .selectFrom("reading")
    .innerJoin("run", "run.id", "reading.runId")
    .innerJoin("person", "person.id", "run.createdBy")
    .where("reading.deviceId", "=", deviceId)
    .groupBy(["run.id", "run.purpose", "person.name"])
    .select([
      "run.id",
      "run.purpose",
      "person.name as person",
      sql<Date>`max(reading.taken_at)`.as("at"),
      sql<number>`min(reading.chamber_c)`.as("lowC"),
      sql<number>`max(reading.chamber_c)`.as("highC"),
      sql<boolean>`bool_or(reading.load_kg > 0)`.as("loaded"),
    ])
    .orderBy("at", "desc")
    .execute();
}

/** Coefficient sets of a device with who decided, newest first. */
export function listSetsOfDevice(db: Db, deviceId: string) {
  return db
    .selectFrom("coefficientSet")
    .innerJoin("derivation", "derivation.id", "coefficientSet.derivationId")
    .innerJoin("person", "person.id", "derivation.createdBy")
    .select([
      "coefficientSet.id",
      "coefficientSet.derivationId",
      "coefficientSet.state",
      "coefficientSet.role",
      "coefficientSet.createdAt",
      "coefficientSet.stateChangedAt",
      "coefficientSet.tempOffset",
      "coefficientSet.tempSlope",
      "coefficientSet.zero",
      "coefficientSet.zeroTc",
      "coefficientSet.zeroTc2",
      "coefficientSet.gain",
      "coefficientSet.gainTc",
      "coefficientSet.gainTc2",
      "derivation.method",
      "person.name as person",
    ])
    .where("coefficientSet.deviceId", "=", deviceId)
    .orderBy("coefficientSet.createdAt", "desc")
    .orderBy("coefficientSet.id", "desc")
    .execute();
}

/** When packages that hold an image of the device went live or left, newest first. */
export function listLivePeriodsOfDevice(db: Db, deviceId: string) {
  return db
    .selectFrom("image")
    .innerJoin("livePeriod", "livePeriod.packageId", "image.packageId")
    .innerJoin("package", "package.id", "image.packageId")
    .innerJoin("person", "person.id", "livePeriod.personId")
    .select([
      "livePeriod.id",
      "livePeriod.kind",
      "livePeriod.packageId",
      "livePeriod.startedAt",
      "livePeriod.reason",
      "package.version",
      "person.name as person",
    ])
    .where("image.deviceId", "=", deviceId)
    .orderBy("livePeriod.startedAt", "desc")
    .execute();
}

/** Serials and lots whose code begins with or contains the text, for the search that is always there. */
export async function searchCodes(db: Db, text: string, limit: number) {
  const devices = await db
    .selectFrom("device")
    .innerJoin("lot", "lot.id", "device.lotId")
    .select(["device.serial", "lot.code as lot"])
    .where(sql<boolean>`position(${text} in device.serial) > 0`)
    .orderBy("device.serial")
    .limit(limit)
    .execute();
  const lots = await db
    .selectFrom("lot")
    .select("code")
    .where(sql<boolean>`position(${text} in code) > 0`)
    .orderBy("code")
    .limit(limit)
    .execute();
  return { devices, lots: lots.map((lot) => lot.code) };
}

export interface ImpactSource {
  run?: string;
  derivation?: string;
  layout?: string;
  package?: string;
  equipment?: string;
  from?: string;
  to?: string;
}

export interface ImpactRow {
  serial: string;
  lot: string;
  coefficients: string | null;
  role: string | null;
  packages: string[];
  carries: string | null;
  outcome: string | null;
  carriesReached: boolean;
  held: boolean;
  shipped: boolean;
}

/**
 * Every device that a run, derivation, layout, package or piece of equipment reached, by serial: through coefficient sets whose
 * derivation used it (a sample device's run reaches the whole lot of a pooled gain), and through the images made from them.
 */
export async function listImpact(
  db: Db,
  source: ImpactSource,
  page: { after?: string; limit: number },
): Promise<ImpactRow[]> {
  const { rows } = await sql<ImpactRow>`
    with reached_run as (
      select r.id from run r where r.id = ${source.run ?? null}::uuid
      union
      select r.id from run r join run_equipment re on re.run_id = r.id join equipment q on q.id = re.equipment_id
      where q.code = ${source.equipment ?? null}::text
        and (${source.from ?? null}::timestamptz is null or r.created_at >= ${source.from ?? null}::timestamptz)
        and (${source.to ?? null}::timestamptz is null or r.created_at <= ${source.to ?? null}::timestamptz)
    ), reached_derivation as (
      select id from derivation where id = ${source.derivation ?? null}::uuid
      union select derivation_id from derivation_run where run_id in (select id from reached_run)
    ), reached_set as (
      select c.id, c.device_id, c.state, c.role, c.created_at from coefficient_set c where c.derivation_id in (select id from reached_derivation)
    ), reached_image as (
      select i.device_id, i.package_id from image i where i.coefficient_set_id in (select id from reached_set)
      union
      select i.device_id, i.package_id from image i join package p on p.id = i.package_id
      where p.id = ${source.package ?? null}::uuid or p.layout_id = ${source.layout ?? null}::uuid
    ), reached_device as (
      select device_id from reached_set union select device_id from reached_image
      union select device_id from reading where run_id in (select id from reached_run)
    ), shown as (
      select d.id, d.serial, d.lot_id, d.held, d.shipped from device d
      where d.id in (select device_id from reached_device) and d.serial > ${page.after ?? ""} order by d.serial limit ${page.limit}
    )
    select d.serial, l.code as lot, s.state as coefficients, s.role, d.held, d.shipped,
      coalesce((select array_agg(p.version order by p.version_major, p.version_minor, p.version_patch)
        from reached_image i join package p on p.id = i.package_id where i.device_id = d.id), '{}') as packages,
      w.version as carries, w.outcome,
      coalesce(w.outcome = 'verified' and exists (select 1 from reached_image i where i.device_id = d.id and i.package_id = w.package_id), false)
        as carries_reached
    from shown d
    join lot l on l.id = d.lot_id
    left join lateral (select state, role from reached_set r where r.device_id = d.id order by created_at desc limit 1) s on true
    left join lateral (
      select newest.outcome, newest.package_id, p.version from (
        select distinct on (r.station_id) r.* from write_record r
        where r.device_id = d.id and r.outcome <> 'failed' order by r.station_id, r.counter desc
      ) newest left join package p on p.id = newest.package_id order by newest.finished_at desc limit 1
    ) w on true
    order by d.serial
  `.execute(db);
  return rows;
}
