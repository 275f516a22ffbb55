import { sql } from "kysely";
import type { Db } from "@/db/executor";
import { decidingWrite } from "@/db/queries/writes";

export interface LotProgressRow {
  devices: number;
  /** Runs that no later one supersedes. */
  runs: number;
  /** Devices with at least one reading. */
  devicesRead: number;
  /** Devices whose newest coefficient set is approved, and is not yet decided. */
  devicesApproved: number;
  devicesProposed: number;
  /** Devices of the live package that are not scrapped, 0 where nothing is live. */
  devicesLive: number;
  /**
   * Devices that are known to carry what is live: the same coefficients in the same layout, be it under an earlier version number.
   * Where nothing is live, devices that are known to carry an image.
   */
  devicesVerified: number;
  /** Devices with a record of a write that touched their memory. */
  devicesWritten: number;
}

/** How many of a lot's devices have got how far. */
export async function getLotProgress(db: Db, lotId: string): Promise<LotProgressRow> {
  const { rows } = await sql<LotProgressRow>`
    with member as (select d.id from device d where d.lot_id = ${lotId}::uuid),
    newest as (
      select s.state from member
      cross join lateral (
        select c.state from coefficient_set c where c.device_id = member.id and c.state is not null
        order by c.created_at desc, c.id desc limit 1) s),
    last_write as (
      select d.id, w.outcome, w.package_id, w.finished_at
      from device d cross join lateral ${decidingWrite} w where d.lot_id = ${lotId}::uuid),
    carried as (
      select w.id, i.coefficient_set_id, p.layout_id
      from last_write w join image i on i.package_id = w.package_id and i.device_id = w.id join package p on p.id = i.package_id
      where w.outcome = 'verified' and not exists (
        select 1 from device_event e where e.device_id = w.id and e.kind = 'board-replaced' and e.at >= w.finished_at)),
    target as (
      select i.device_id as id, i.coefficient_set_id, p.layout_id
      from package p join image i on i.package_id = p.id join device d on d.id = i.device_id
      where p.lot_id = ${lotId}::uuid and p.state = 'live' and not d.scrapped)
    select
      (select count(*)::int from member) as devices,
      (select count(*)::int from run r where r.lot_id = ${lotId}::uuid
        and not exists (select 1 from run later where later.supersedes_id = r.id)) as runs,
      (select count(*)::int from member where exists (select 1 from reading g where g.device_id = member.id)) as devices_read,
      (select count(*)::int from newest where state = 'approved') as devices_approved,
      (select count(*)::int from newest where state = 'proposed') as devices_proposed,
      (select count(*)::int from target) as devices_live,
      case when exists (select 1 from target) then (select count(*)::int from carried join target using (id, coefficient_set_id, layout_id))
        else (select count(*)::int from carried) end as devices_verified,
      (select count(*)::int from last_write) as devices_written
  `.execute(db);
  return rows[0] as LotProgressRow;
}

export interface NewestPackageRow {
  id: string;
  version: string;
  state: string;
  /** Checks with the verdict fail. */
  failed: number;
  /** Its build was cancelled. */
  cancelled: boolean;
}

const isCancelled = sql<boolean>`coalesce(package.failure ->> 'code' = 'package.cancelled', false)`;

/**
 * The package that tells where a lot stands: the one with the highest number, but one that gave way to another (superseded, or
 * withdrawn before an earlier release went live again) or was cancelled only where there is no other.
 */
export async function findNewestPackage(db: Db, lotId: string): Promise<NewestPackageRow | undefined> {
  return db
    .selectFrom("package")
    .select(["package.id", "package.version", "package.state"])
    .select(isCancelled.as("cancelled"))
    .select((eb) =>
      eb
        .selectFrom("packageCheck")
        .select(sql<number>`count(*)::int`.as("count"))
        .whereRef("packageCheck.packageId", "=", "package.id")
        .where("packageCheck.verdict", "=", "fail")
        .$asScalar()
        .as("failed"),
    )
    .where("package.lotId", "=", lotId)
    .orderBy(
      sql`case when ${isCancelled} then 3 else case package.state when 'superseded' then 2 when 'withdrawn' then 1 else 0 end end`,
    )
    .orderBy("package.versionMajor", "desc")
    .orderBy("package.versionMinor", "desc")
    .orderBy("package.versionPatch", "desc")
    .limit(1)
    .executeTakeFirst()
    .then((row) => row && { ...row, failed: row.failed ?? 0 });
}
