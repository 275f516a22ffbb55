/** Bearer keys as they are presented: found by their SHA-256, never by themselves. */
import type { Db } from "@/db/executor";
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
