import { sql } from "kysely";
import type { Db } from "@/db/executor";
import { decidingWrite } from "@/db/queries/writes";

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

/** Coefficient sets of a device with who derived them, newest first. */
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

export interface ImpactSource {
  run?: string;
  derivation?: string;
  layout?: string;
  package?: string;
  equipment?: string;
  from?: string;
  to?: string;
}

/** Whether there is such a thing: equipment by its code, all others by id. */
export async function isImpactSource(
  db: Db,
  noun: "run" | "derivation" | "layout" | "package" | "equipment",
  idOrCode: string,
): Promise<boolean> {
  const match = noun === "equipment" ? sql`code = ${idOrCode}` : sql`id = ${idOrCode}::uuid`;
  const { rows } = await sql`select 1 from ${sql.table(noun)} where ${match}`.execute(db);
  return rows.length > 0;
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
 * Every device that a run, derivation, layout, package or piece of equipment reached, by serial: through its readings, through
 * coefficient sets that rest on them, and through the images made from those. A sample run reaches every device of a pooled-gain
 * derivation that used it, since all of them carry its gain coefficient; any other run only the devices that it measured.
 */
export async function listImpact(
  db: Db,
  source: ImpactSource,
  page: { after?: string; limit: number },
): Promise<ImpactRow[]> {
  const from = source.from ?? null;
  const to = source.to ?? null;
  const { rows } = await sql<ImpactRow>`
    with reached_run as (
      select r.id, r.purpose from run r where r.id = ${source.run ?? null}::uuid
      union
      select r.id, r.purpose from run r join run_equipment re on re.run_id = r.id join equipment q on q.id = re.equipment_id
      where q.code = ${source.equipment ?? null}::text and exists (
        select 1 from reading g where g.run_id = r.id
          and (${from}::timestamptz is null or g.taken_at >= ${from}::timestamptz)
          and (${to}::timestamptz is null or g.taken_at <= ${to}::timestamptz))
    ), measured as (
      select distinct g.run_id, g.device_id from reading g where g.run_id in (select id from reached_run)
    ), reached_set as (
      select c.id, c.device_id, c.state, c.role, c.created_at from coefficient_set c
      where c.derivation_id = ${source.derivation ?? null}::uuid
      union
      select c.id, c.device_id, c.state, c.role, c.created_at
      from reached_run r join derivation_run dr on dr.run_id = r.id join derivation v on v.id = dr.derivation_id
      join coefficient_set c on c.derivation_id = v.id
      where (v.method = 'pooled-gain' and r.purpose = 'sample')
         or exists (select 1 from measured m where m.run_id = r.id and m.device_id = c.device_id)
    ), reached_image as (
      select i.device_id, i.package_id from image i where i.coefficient_set_id in (select id from reached_set)
      union
      select i.device_id, i.package_id from image i join package p on p.id = i.package_id
      where p.id = ${source.package ?? null}::uuid or p.layout_id = ${source.layout ?? null}::uuid
    ), reached_device as (
      select device_id from reached_set union select device_id from reached_image union select device_id from measured
    ), newest_set as (
      select distinct on (device_id) device_id, state, role from reached_set order by device_id, created_at desc
    ), packed as (
      select i.device_id, array_agg(p.id) as ids,
        array_agg(p.version order by p.version_major, p.version_minor, p.version_patch) as versions
      from reached_image i join package p on p.id = i.package_id group by i.device_id
    ), shown as (
      select d.id, d.serial, d.lot_id, d.held, d.shipped from device d
      where d.id in (select device_id from reached_device) and d.serial > ${page.after ?? ""} order by d.serial limit ${page.limit}
    )
    select d.serial, l.code as lot, s.state as coefficients, s.role, d.held, d.shipped, coalesce(k.versions, '{}') as packages,
      case when known.yes then p.version end as carries, w.outcome,
      known.yes and coalesce(w.package_id = any(k.ids), false) as carries_reached
    from shown d
    join lot l on l.id = d.lot_id
    left join newest_set s on s.device_id = d.id
    left join packed k on k.device_id = d.id
    left join lateral ${decidingWrite} w on true
    left join package p on p.id = w.package_id
    cross join lateral (
      select coalesce(w.outcome = 'verified', false) and not exists (
        select 1 from device_event e where e.device_id = d.id and e.kind = 'board-replaced' and e.at >= w.finished_at) as yes
    ) known
    order by d.serial
  `.execute(db);
  return rows;
}
