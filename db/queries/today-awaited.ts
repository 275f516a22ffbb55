import { sql } from "kysely";
import type { Db } from "@/db/executor";
import type { WaitingRow } from "./today";

/** What a person made or asked for and somebody else has to decide, longest waiting first. */
export async function listAwaited(db: Db, personId: string, limit: number): Promise<WaitingRow[]> {
  const { rows } = await sql<WaitingRow>`
    select * from (
      select 'family-revision' as kind, r.id, f.code as family, null as lot, r.number::text as version, r.state, null::int as count,
             null as reason, null as person, r.submitted_at as at
      from family_revision r join family f on f.id = r.family_id
      where r.state = 'in-review' and is_maker('family-revision', r.id, ${personId}::uuid)
      union all
      select 'layout', l.id, f.code, null, l.version, l.state, null, null, null, l.submitted_at
      from layout l join family f on f.id = l.family_id
      where l.state = 'in-review' and is_maker('layout', l.id, ${personId}::uuid)
      union all
      select 'derivation', d.id, null, t.code, null, d.state,
             (select count(*)::int from coefficient_set c where c.derivation_id = d.id and c.state = 'proposed'),
             null, null, coalesce(d.finished_at, d.created_at)
      from derivation d join lot t on t.id = d.lot_id
      where d.state in ('proposed', 'partly-approved') and d.created_by = ${personId}::uuid
        and exists (select 1 from coefficient_set c where c.derivation_id = d.id and c.state = 'proposed')
      union all
      select 'package', k.id, null, t.code, k.version, k.state, (k.counts ->> 'devices')::int, null, null, k.submitted_at
      from package k join lot t on t.id = k.lot_id
      where k.state = 'in-review' and is_maker('package', k.id, ${personId}::uuid)
      union all
      select 'reinstatement', k.id, null, t.code, k.version, r.state, null, r.reason, null, r.asked_at
      from reinstatement r join package k on k.id = r.package_id join lot t on t.id = r.lot_id
      where r.state = 'asked' and r.asked_by = ${personId}::uuid
    ) awaited order by at, id limit ${limit}
  `.execute(db);
  return rows;
}
