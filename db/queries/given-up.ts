import { sql } from "kysely";
import type { Db } from "@/db/executor";

/** Work that is begun and that no job goes on with. */
export interface GivenUp {
  packages: string[];
  derivations: string[];
}

/**
 * Packages that are building and derivations at work whose job failed for the last time or is gone. A job is put on its queue in
 * the transaction that begins its work, so that there is none without one but these.
 */
export async function listGivenUp(db: Db): Promise<GivenUp> {
  const { rows } = await sql<{ kind: keyof GivenUp; id: string }>`
    select 'packages' as kind, package.id from package where state = 'building' and not exists (
      select 1 from pgboss.job where name = 'build-package' and data ->> 'packageId' = package.id::text
        and job.state in ('created', 'retry', 'active'))
    union all
    select 'derivations', derivation.id from derivation where state = 'working' and not exists (
      select 1 from pgboss.job where name = 'derive' and data ->> 'derivationId' = derivation.id::text
        and job.state in ('created', 'retry', 'active'))
  `.execute(db);
  const of = (kind: keyof GivenUp) => rows.filter((row) => row.kind === kind).map((row) => row.id);
  return { packages: of("packages"), derivations: of("derivations") };
}
