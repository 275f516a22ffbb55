/** Bearer keys as they are presented: found by their SHA-256, never by themselves. */
import type { Db, Trx } from "@/db/executor";
import { type Holder, heldRoles } from "@/db/queries/people";

/** The active person behind an access key that is neither expired nor revoked. */
export async function findAccessKeyHolder(
  db: Db,
  keyHash: Buffer,
  now: Date,
): Promise<(Holder & { keyId: string; lastUsedAt: Date | null }) | undefined> {
  return db
    .selectFrom("accessKey")
    .innerJoin("person", "person.id", "accessKey.personId")
    .select([
      "accessKey.id as keyId",
      "accessKey.lastUsedAt",
      "person.id as personId",
      "person.name",
      "person.email",
      heldRoles.as("roles"),
    ])
    .where("accessKey.keyHash", "=", keyHash)
    .where("accessKey.revokedAt", "is", null)
    .where("accessKey.expiresAt", ">", now)
    .where("person.active", "=", true)
    .executeTakeFirst();
}

export async function touchAccessKey(db: Db, keyId: string, now: Date): Promise<void> {
  await db.updateTable("accessKey").set({ lastUsedAt: now }).where("id", "=", keyId).execute();
}

export interface AccessKeyRow {
  id: string;
  name: string;
  prefix: string;
  createdAt: Date;
  expiresAt: Date;
  lastUsedAt: Date | null;
  revokedAt: Date | null;
}

/** A person's access keys, newest first; `before` is the last id of the page before. */
export async function listAccessKeys(
  db: Db,
  personId: string,
  page: { limit: number; before?: string },
): Promise<AccessKeyRow[]> {
  let query = db
    .selectFrom("accessKey")
    .select(["id", "name", "prefix", "createdAt", "expiresAt", "lastUsedAt", "revokedAt"])
    .where("personId", "=", personId)
    .orderBy("id", "desc")
    .limit(page.limit);
  if (page.before !== undefined) query = query.where("id", "<", page.before);
  return query.execute();
}

/** Keys of a person that work now. */
export async function countWorkingAccessKeys(db: Db, personId: string, now: Date): Promise<number> {
  const { count } = await db
    .selectFrom("accessKey")
    .select((eb) => eb.fn.countAll<string>().as("count"))
    .where("personId", "=", personId)
    .where("revokedAt", "is", null)
    .where("expiresAt", ">", now)
    .executeTakeFirstOrThrow();
  return Number(count);
}

export interface NewAccessKey {
  id: string;
  personId: string;
  name: string;
  keyHash: Buffer;
  prefix: string;
  createdAt: Date;
  expiresAt: Date;
}

export async function insertAccessKey(trx: Trx, key: NewAccessKey): Promise<void> {
  await trx.insertInto("accessKey").values(key).execute();
}

/** Revokes a key of a person. @returns its name, undefined where the person has no such key or it was revoked before */
export async function revokeAccessKey(
  trx: Trx,
  key: { id: string; personId: string; revokedAt: Date },
): Promise<string | undefined> {
  const row = await trx
    .updateTable("accessKey")
    .set({ revokedAt: key.revokedAt })
    .where("id", "=", key.id)
    .where("personId", "=", key.personId)
    .where("revokedAt", "is", null)
    .returning("name")
    .executeTakeFirst();
  return row?.name;
}

/** Revokes whatever keys a person has. @returns how many worked until now */
export async function revokeAccessKeys(trx: Trx, personId: string, revokedAt: Date): Promise<number> {
  const result = await trx
    .updateTable("accessKey")
    .set({ revokedAt })
    .where("personId", "=", personId)
    .where("revokedAt", "is", null)
    .executeTakeFirst();
  return Number(result.numUpdatedRows);
}

export interface StationKeyHolder {
  keyId: string;
  lastUsedAt: Date | null;
  stationId: string;
  name: string;
  familyIds: string[];
}

/** The active station behind a key that is not revoked, with the families it may write. */
export async function findStationKeyHolder(db: Db, keyHash: Buffer): Promise<StationKeyHolder | undefined> {
  const row = await db
    .selectFrom("stationKey")
    .innerJoin("station", "station.id", "stationKey.stationId")
    .select(["stationKey.id as keyId", "stationKey.lastUsedAt", "station.id as stationId", "station.name"])
    .where("stationKey.keyHash", "=", keyHash)
    .where("stationKey.revokedAt", "is", null)
    .where("station.active", "=", true)
    .executeTakeFirst();
  if (row === undefined) return undefined;
  const families = await db
    .selectFrom("stationFamily")
    .select("familyId")
    .where("stationId", "=", row.stationId)
    .execute();
  return { ...row, familyIds: families.map(({ familyId }) => familyId) };
}

export async function touchStationKey(db: Db, keyId: string, stationId: string, now: Date): Promise<void> {
  await db.updateTable("stationKey").set({ lastUsedAt: now }).where("id", "=", keyId).execute();
  await db.updateTable("station").set({ lastSeenAt: now }).where("id", "=", stationId).execute();
}
