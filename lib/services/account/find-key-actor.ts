import { createHash } from "node:crypto";
import type { Db } from "@/db/executor";
import { findAccessKeyHolder, findStationKeyHolder, touchAccessKey, touchStationKey } from "@/db/queries/keys";
import { ACCESS_KEY_PREFIX, isDueForTouch, STATION_KEY_PREFIX } from "@/lib/domain/credentials";
import type { PersonActor, StationActor } from "@/lib/services/context";

/** What is stored of a key. Keys are 256 random bits, so a plain hash can't be guessed back. */
export function keyHashOf(key: string): Buffer {
  return createHash("sha256").update(key).digest();
}

/** Who a bearer key stands for now; undefined where it is unknown, expired or revoked. Notes its use once a minute at most. */
export async function findKeyActor(db: Db, key: string, now: Date): Promise<PersonActor | StationActor | undefined> {
  if (key.startsWith(ACCESS_KEY_PREFIX)) return findPerson(db, key, now);
  if (key.startsWith(STATION_KEY_PREFIX)) return findStation(db, key, now);
  return undefined;
}

async function findPerson(db: Db, key: string, now: Date): Promise<PersonActor | undefined> {
  const holder = await findAccessKeyHolder(db, keyHashOf(key), now);
  if (holder === undefined) return undefined;
  if (isDueForTouch(holder.lastUsedAt, now)) await touchAccessKey(db, holder.keyId, now);
  return { kind: "person", id: holder.personId, name: holder.name, roles: holder.roles, via: "key", sessionId: null };
}

async function findStation(db: Db, key: string, now: Date): Promise<StationActor | undefined> {
  const holder = await findStationKeyHolder(db, keyHashOf(key));
  if (holder === undefined) return undefined;
  if (isDueForTouch(holder.lastUsedAt, now)) await touchStationKey(db, holder.keyId, holder.stationId, now);
  return { kind: "station", id: holder.stationId, name: holder.name, familyIds: holder.familyIds };
}
