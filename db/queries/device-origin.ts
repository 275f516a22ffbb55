import { sql } from "kysely";
import type { Db } from "@/db/executor";
import type { LayoutDocument } from "@/schemas/documents/layout";

/** A device's image in a package with everything it was made from; undefined where the package has none of it. */
export async function findImageOrigin(db: Db, packageId: string, deviceId: string) {
  const row = await db
    .selectFrom("image")
    .innerJoin("package", "package.id", "image.packageId")
    .innerJoin("layout", "layout.id", "package.layoutId")
    .innerJoin("familyRevision", "familyRevision.id", "package.familyRevisionId")
    .innerJoin("coefficientSet", "coefficientSet.id", "image.coefficientSetId")
    .innerJoin("derivation", "derivation.id", "coefficientSet.derivationId")
    .innerJoin("person as builder", "builder.id", "package.createdBy")
    .innerJoin("person as deriver", "deriver.id", "derivation.createdBy")
    .select([
      "image.packageId",
      "image.bytes",
      "image.sha256",
      "image.hardwareId",
      "package.version",
      "package.state",
      "package.digest",
      "package.firmware",
      "package.createdAt as builtAt",
      "builder.name as builder",
      "layout.id as layoutId",
      "layout.version as layoutVersion",
      "layout.sha256 as layoutSha256",
      "layout.document as layoutDocument",
      "familyRevision.id as revisionId",
      "familyRevision.number as revisionNumber",
      "familyRevision.sha256 as revisionSha256",
      "coefficientSet.role",
      "coefficientSet.state as setState",
      "derivation.id as derivationId",
      "derivation.method",
      "derivation.fitOrder",
      "derivation.sha256 as derivationSha256",
      "derivation.engine",
      "derivation.provenLowC",
      "derivation.provenHighC",
      "derivation.createdAt as derivedAt",
      "deriver.name as deriver",
    ])
    .where("image.packageId", "=", packageId)
    .where("image.deviceId", "=", deviceId)
    .executeTakeFirst();
  return row && { ...row, layoutDocument: row.layoutDocument as unknown as LayoutDocument };
}

export type ImageOriginRow = NonNullable<Awaited<ReturnType<typeof findImageOrigin>>>;

export interface OriginRunRow {
  id: string;
  purpose: string;
  sha256: Buffer;
  createdAt: Date;
  person: string;
  supersededById: string | null;
  /** This device's own rows in the run: their number, chamber temperatures, and whether one was loaded. */
  ownRows: number;
  ownLowC: number | null;
  ownHighC: number | null;
  ownLoaded: boolean;
  /** Equipment as it stood then: `code, kind, certificate`. */
  equipment: { code: string; kind: string; certificate: string }[];
}

/** Runs of a derivation, oldest first, each with what it measured on one device. */
export async function listOriginRuns(db: Db, derivationId: string, deviceId: string): Promise<OriginRunRow[]> {
  const { rows } = await sql<OriginRunRow>`
    select r.id, r.purpose, r.sha256, r.created_at, p.name as person, later.id as superseded_by_id,
           own.rows::int as own_rows, own.low_c as own_low_c, own.high_c as own_high_c, coalesce(own.loaded, false) as own_loaded,
           coalesce((select jsonb_agg(jsonb_build_object('code', q.code, 'kind', q.kind, 'certificate', e.certificate) order by q.code)
             from run_equipment e join equipment q on q.id = e.equipment_id where e.run_id = r.id), '[]'::jsonb) as equipment
    from derivation_run d
    join run r on r.id = d.run_id
    join person p on p.id = r.created_by
    left join run later on later.supersedes_id = r.id
    left join lateral (
      select count(*) as rows, min(g.chamber_c) as low_c, max(g.chamber_c) as high_c, bool_or(g.load_kg > 0) as loaded
      from reading g where g.run_id = r.id and g.device_id = ${deviceId}::uuid
    ) own on true
    where d.derivation_id = ${derivationId}::uuid
    order by r.id
  `.execute(db);
  return rows;
}

export interface SignatureRow {
  subjectKind: string;
  subjectId: string;
  name: string;
  meaning: string;
  at: Date;
}

/** Approvals of the named subjects, oldest first. */
export function listSignatures(db: Db, subjectIds: readonly string[]): Promise<SignatureRow[]> {
  return db
    .selectFrom("approval")
    .select(["subjectKind", "subjectId", "personName as name", "meaning", "at"])
    .where("decision", "=", "approve")
    .where(sql<boolean>`subject_id = any(${subjectIds as string[]}::uuid[])`)
    .orderBy("at")
    .execute();
}

/**
 * Approvals that let a device's bytes into the world, newest first: of packages that were approved and hold an image of it,
 * and of derivations whose set of it was approved.
 */
export async function listApprovalsOfDevice(
  db: Db,
  deviceId: string,
): Promise<(SignatureRow & { version: string | null })[]> {
  const { rows } = await sql<SignatureRow & { version: string | null }>`
    select a.subject_kind, a.subject_id, a.person_name as name, a.meaning, a.at, p.version
    from image i join package p on p.id = i.package_id
    join approval a on a.subject_kind = 'package' and a.subject_id = p.id and a.decision = 'approve'
    where i.device_id = ${deviceId}::uuid and p.state in ('approved', 'live', 'superseded', 'withdrawn')
    union all
    select a.subject_kind, a.subject_id, a.person_name, a.meaning, a.at, null
    from coefficient_set c
    join approval a on a.subject_kind = 'derivation' and a.subject_id = c.derivation_id and a.decision = 'approve'
    where c.device_id = ${deviceId}::uuid and c.state in ('approved', 'stale', 'revoked')
    order by at desc
  `.execute(db);
  return rows;
}
