import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** Something that waits for somebody. What is null does not apply to its kind. */
export interface WaitingRow {
  kind: "family-revision" | "layout" | "derivation" | "package" | "waiver" | "reinstatement";
  id: string;
  family: string | null;
  lot: string | null;
  version: string | null;
  state: string;
  /** Devices of a derivation or package, warnings without a waiver, or null. */
  count: number | null;
  reason: string | null;
  person: string;
  at: Date;
}

/** What a reviewer may decide: in review or proposed, and not made or asked for by them. Oldest first. */
export async function listToDecide(db: Db, personId: string, limit: number): Promise<WaitingRow[]> {
  const { rows } = await sql<WaitingRow>`
    select * from (
      select 'family-revision' as kind, r.id, f.code as family, null as lot, r.number::text as version, r.state, null::int as count,
             null as reason, p.name as person, r.submitted_at as at
      from family_revision r join family f on f.id = r.family_id join person p on p.id = coalesce(r.submitted_by, r.created_by)
      where r.state = 'in-review' and not is_maker('family-revision', r.id, ${personId}::uuid)
      union all
      select 'layout', l.id, f.code, null, l.version, l.state, null, null, p.name, l.submitted_at
      from layout l join family f on f.id = l.family_id join person p on p.id = coalesce(l.submitted_by, l.updated_by)
      where l.state = 'in-review' and not is_maker('layout', l.id, ${personId}::uuid)
      union all
      select 'derivation', d.id, null, t.code, null, d.state,
             (select count(*)::int from coefficient_set c where c.derivation_id = d.id and c.state = 'proposed'),
             null, p.name, coalesce(d.finished_at, d.created_at)
      from derivation d join lot t on t.id = d.lot_id join person p on p.id = d.created_by
      where d.state in ('proposed', 'partly-approved') and not is_maker('derivation', d.id, ${personId}::uuid)
        and exists (select 1 from coefficient_set c where c.derivation_id = d.id and c.state = 'proposed')
      union all
      select 'package', k.id, null, t.code, k.version, k.state, (k.counts ->> 'devices')::int, null, p.name, k.submitted_at
      from package k join lot t on t.id = k.lot_id join person p on p.id = coalesce(k.submitted_by, k.created_by)
      where k.state = 'in-review' and not is_maker('package', k.id, ${personId}::uuid)
      union all
      select 'waiver', k.id, null, t.code, k.version, k.state, open.count, null, p.name, coalesce(k.built_at, k.created_at)
      from package k join lot t on t.id = k.lot_id join person p on p.id = k.created_by
      cross join lateral (
        select count(*)::int as count from package_check c where c.package_id = k.id and c.verdict = 'warn'
          and not exists (select 1 from waiver w where w.package_id = c.package_id and w.check_code = c.code)) open
      where k.state = 'draft' and open.count > 0 and not is_maker('package', k.id, ${personId}::uuid)
        and not exists (select 1 from package_check c where c.package_id = k.id and c.verdict = 'fail')
      union all
      select 'reinstatement', k.id, null, t.code, k.version, r.state, null, r.reason, p.name, r.asked_at
      from reinstatement r join package k on k.id = r.package_id join lot t on t.id = r.lot_id join person p on p.id = r.asked_by
      where r.state = 'asked' and r.asked_by <> ${personId}::uuid
    ) waiting order by at, id limit ${limit}
  `.execute(db);
  return rows;
}

/** What an engineer has open: own drafts, own work that was refused or failed and that nothing newer replaced. Newest first. */
export async function listOwnWork(db: Db, personId: string, limit: number): Promise<WaitingRow[]> {
  const { rows } = await sql<WaitingRow>`
    select * from (
      select 'family-revision' as kind, r.id, f.code as family, null as lot, r.number::text as version, r.state, null::int as count,
             refused.reason, coalesce(refused.person_name, p.name) as person, coalesce(refused.at, r.created_at) as at
      from family_revision r join family f on f.id = r.family_id join person p on p.id = r.created_by
      left join lateral ${lastRefusal("family-revision", "r")} refused on true
      where r.state = 'draft' and r.created_by = ${personId}::uuid
      union all
      select 'layout', l.id, f.code, null, l.version, l.state, null, refused.reason, coalesce(refused.person_name, p.name),
             greatest(refused.at, l.updated_at)
      from layout l join family f on f.id = l.family_id join person p on p.id = l.updated_by
      left join lateral ${lastRefusal("layout", "l")} refused on true
      where l.state = 'draft' and is_maker('layout', l.id, ${personId}::uuid)
      union all
      select 'derivation', d.id, null, t.code, null,
             case when refused.decision = 'revoke' then 'revoked' else d.state end, (d.counts ->> 'devices')::int, refused.reason,
             coalesce(refused.person_name, p.name), coalesce(refused.at, d.finished_at, d.created_at)
      from derivation d join lot t on t.id = d.lot_id join person p on p.id = d.created_by
      left join lateral (
        select a.decision, a.reason, a.person_name, a.at from approval a
        where a.subject_kind = 'derivation' and a.subject_id = d.id and a.decision <> 'approve' order by a.at desc limit 1
      ) refused on true
      where (d.state in ('refused', 'failed') or refused.at is not null) and d.created_by = ${personId}::uuid
        and not exists (select 1 from derivation later where later.lot_id = d.lot_id and later.id > d.id)
      union all
      select 'package', k.id, null, t.code, k.version, k.state, (k.counts ->> 'devices')::int, refused.reason,
             coalesce(refused.person_name, p.name), coalesce(refused.at, k.built_at, k.created_at)
      from package k join lot t on t.id = k.lot_id join person p on p.id = k.created_by
      left join lateral ${lastRefusal("package", "k")} refused on true
      where k.state in ('draft', 'failed', 'refused') and is_maker('package', k.id, ${personId}::uuid)
        and not exists (select 1 from package later where later.lot_id = k.lot_id and later.id > k.id)
    ) own order by at desc, id limit ${limit}
  `.execute(db);
  return rows;
}

function lastRefusal(kind: string, alias: string) {
  return sql`(
    select a.reason, a.person_name, a.at from approval a
    where a.subject_kind = ${kind} and a.subject_id = ${sql.ref(alias)}.id and a.decision = 'refuse' order by a.at desc limit 1
  )`;
}

/** Approved packages that nobody made live yet, oldest first. */
export async function listToRelease(db: Db, limit: number): Promise<WaitingRow[]> {
  const { rows } = await sql<WaitingRow>`
    select 'package' as kind, k.id, null as family, t.code as lot, k.version, k.state, (k.counts ->> 'devices')::int as count,
           null as reason, p.name as person, coalesce(k.approved_at, k.created_at) as at
    from package k join lot t on t.id = k.lot_id join person p on p.id = k.created_by
    where k.state = 'approved' order by k.approved_at, k.id limit ${limit}
  `.execute(db);
  return rows;
}

export interface TroubleRow {
  serial: string;
  outcome: string;
  flags: string[];
  version: string | null;
  station: string;
  operator: string;
  at: Date;
}

/**
 * Write records since a time that a person should look at, newest first: what is not verified or carries a flag, as long as it
 * is the serial's newest record.
 */
export async function listTroubleWrites(db: Db, since: Date, limit: number): Promise<TroubleRow[]> {
  const { rows } = await sql<TroubleRow>`
    select w.serial, w.outcome, w.flags, k.version, s.name as station, w.operator, w.received_at as at
    from write_record w join station s on s.id = w.station_id left join package k on k.id = w.package_id
    where (w.outcome <> 'verified' or w.flags <> '{}') and w.received_at >= ${since}
      and not exists (select 1 from write_record later where later.serial = w.serial and later.finished_at > w.finished_at)
    order by w.received_at desc, w.id desc limit ${limit}
  `.execute(db);
  return rows;
}

export interface HeldRow {
  serial: string;
  lot: string;
  reason: string;
  person: string;
  personId: string;
  at: Date;
}

/** Devices that are held, with who held them and why, longest held first. */
export async function listHeldDevices(db: Db, limit: number): Promise<HeldRow[]> {
  const { rows } = await sql<HeldRow>`
    select d.serial, t.code as lot, e.reason, p.name as person, e.person_id, e.at
    from device d join lot t on t.id = d.lot_id
    cross join lateral (
      select * from device_event h where h.device_id = d.id and h.kind = 'hold' order by h.at desc, h.id desc limit 1) e
    join person p on p.id = e.person_id
    where d.held and not d.scrapped order by e.at, d.serial limit ${limit}
  `.execute(db);
  return rows;
}

export interface GrantRow {
  id: string;
  person: string;
  role: string;
  askedBy: string;
  at: Date;
}

/** Roles that another admin asked for somebody else and that this one may confirm, oldest first. */
export async function listGrantsToConfirm(db: Db, personId: string, limit: number): Promise<GrantRow[]> {
  const { rows } = await sql<GrantRow>`
    select g.id, p.name as person, g.role, a.name as asked_by, g.asked_at as at
    from role_grant g join person p on p.id = g.person_id join person a on a.id = g.asked_by
    where g.confirmed_at is null and g.ended_at is null and g.asked_by <> ${personId}::uuid and g.person_id <> ${personId}::uuid
    order by g.asked_at, g.id limit ${limit}
  `.execute(db);
  return rows;
}

export interface LiveRow {
  lot: string;
  family: string;
  packageId: string;
  version: string;
  digest: Buffer;
  devices: number;
  at: Date;
}

/** Live releases, newest first: what operators write. */
export async function listLiveReleases(db: Db, limit: number): Promise<LiveRow[]> {
  const { rows } = await sql<LiveRow>`
    select t.code as lot, f.code as family, k.id as package_id, k.version, k.digest, v.started_at as at,
           (select count(*)::int from image i where i.package_id = k.id) as devices
    from package k join lot t on t.id = k.lot_id join family f on f.id = t.family_id
    cross join lateral (
      select started_at from live_period l where l.package_id = k.id order by l.sequence desc limit 1) v
    where k.state = 'live' order by v.started_at desc, k.id limit ${limit}
  `.execute(db);
  return rows;
}
