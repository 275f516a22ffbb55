import type { Db } from "@/db/executor";

/** Newest runs with lot, purpose and who uploaded them. */
export function listRunChoices(db: Db, limit: number) {
  return db
    .selectFrom("run")
    .innerJoin("lot", "lot.id", "run.lotId")
    .innerJoin("person", "person.id", "run.createdBy")
    .select(["run.id", "lot.code as lot", "run.purpose", "run.createdAt", "person.name as person"])
    .orderBy("run.id", "desc")
    .limit(limit)
    .execute();
}

/** Newest derivations with lot, method and state. */
export function listDerivationChoices(db: Db, limit: number) {
  return db
    .selectFrom("derivation")
    .innerJoin("lot", "lot.id", "derivation.lotId")
    .innerJoin("person", "person.id", "derivation.createdBy")
    .select(["derivation.id", "lot.code as lot", "derivation.method", "derivation.state", "derivation.createdAt"])
    .select("person.name as person")
    .orderBy("derivation.id", "desc")
    .limit(limit)
    .execute();
}

/** Newest packages with lot, version and state. */
export function listPackageChoices(db: Db, limit: number) {
  return db
    .selectFrom("package")
    .innerJoin("lot", "lot.id", "package.lotId")
    .select(["package.id", "lot.code as lot", "package.version", "package.state", "package.createdAt"])
    .orderBy("package.id", "desc")
    .limit(limit)
    .execute();
}

/** Newest layouts with family, version and state. */
export function listLayoutChoices(db: Db, limit: number) {
  return db
    .selectFrom("layout")
    .innerJoin("family", "family.id", "layout.familyId")
    .select(["layout.id", "family.code as family", "layout.version", "layout.state"])
    .orderBy("layout.id", "desc")
    .limit(limit)
    .execute();
}

/** Equipment by code. */
export function listEquipmentChoices(db: Db, limit: number) {
  return db.selectFrom("equipment").select(["code", "kind"]).orderBy("code").limit(limit).execute();
}
