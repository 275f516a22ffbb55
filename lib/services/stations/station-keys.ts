import { randomBytes } from "node:crypto";
import * as query from "@/db/queries/stations";
import { STATION_KEY_PREFIX } from "@/lib/domain/credentials";
import { AppError } from "@/lib/errors";
import { keyHashOf } from "@/lib/services/account/find-key-actor";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";

/** Characters of a key that stay visible, so that people can tell which one is in a station. */
const SHOWN_CHARACTERS = 6;

/**
 * Makes a key for a station. The key is returned this once; what is stored is its SHA-256.
 * @throws AppError `station.not_found`, `auth.forbidden`, and as {@link confirmIdentity}
 */
export async function addStationKey(
  ctx: PersonCtx,
  input: { stationId: string } & Confirmation,
): Promise<{ id: string; key: string; prefix: string }> {
  assertRole(ctx, "admin");
  const { stationId } = input;
  await query.getStation(ctx.db, stationId);
  await confirmIdentity(ctx, input);
  const key = STATION_KEY_PREFIX + randomBytes(32).toString("base64url");
  const id = ctx.newId();
  const prefix = key.slice(0, STATION_KEY_PREFIX.length + SHOWN_CHARACTERS);
  await ctx.db.transaction().execute(async (trx) => {
    const made = { createdAt: ctx.now(), createdBy: ctx.actor.id };
    await query.insertStationKey(trx, { id, stationId, keyHash: keyHashOf(key), prefix, ...made });
    await appendEvent(ctx, trx, { action: "station-key.made", subject: stationId, data: { key: id, prefix } });
  });
  return { id, key, prefix };
}

/** Revokes a station's key at once. @throws AppError `key.not_found`, `auth.forbidden` */
export async function revokeStationKey(ctx: PersonCtx, input: { stationId: string; key: string }): Promise<void> {
  assertRole(ctx, "admin");
  const { stationId, key } = input;
  await ctx.db.transaction().execute(async (trx) => {
    const revoked = await query.revokeStationKey(trx, {
      id: key,
      stationId,
      revokedAt: ctx.now(),
      revokedBy: ctx.actor.id,
    });
    if (!revoked)
      throw new AppError("key.not_found", { key, message: "The station has no such key, or it was revoked before." });
    await appendEvent(ctx, trx, { action: "station-key.revoked", subject: stationId, data: { key } });
  });
}
