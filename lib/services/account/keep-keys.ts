import { randomBytes } from "node:crypto";
import * as query from "@/db/queries/keys";
import { lockPerson } from "@/db/queries/people";
import { ACCESS_KEY_PREFIX } from "@/lib/domain/credentials";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Page, pageOf } from "@/lib/services/page";
import { type Confirmation, confirmIdentity } from "@/lib/services/people/confirm-identity";
import type { AccessKeyView, MadeAccessKey } from "@/schemas/api/account";
import { keyHashOf } from "./find-key-actor";

/** Keys of one person that work at the same time; more than that nobody keeps apart. */
export const KEYS_MAX = 20;
const DAY_MS = 24 * 60 * 60 * 1000;
const SHOWN = ACCESS_KEY_PREFIX.length + 6;

function viewOf(row: query.AccessKeyRow): AccessKeyView {
  const { id, name, prefix } = row;
  return {
    id,
    name,
    prefix,
    createdAt: row.createdAt.toISOString(),
    expiresAt: row.expiresAt.toISOString(),
    lastUsedAt: row.lastUsedAt?.toISOString() ?? null,
    revokedAt: row.revokedAt?.toISOString() ?? null,
  };
}

/** One's own keys, newest first, those that ended included. */
export async function listKeys(ctx: PersonCtx, page: { limit: number; cursor?: string }): Promise<Page<AccessKeyView>> {
  const rows = await query.listAccessKeys(ctx.db, ctx.actor.id, { limit: page.limit + 1, before: page.cursor });
  return pageOf(rows.map(viewOf), page.limit, (row) => row.id);
}

/**
 * Makes a key for reading and engineer's work. It is returned this once; what is stored is its SHA-256.
 * @throws AppError `auth.password_wrong`, `key.too_many`; nothing is then written.
 */
export async function makeKey(
  ctx: PersonCtx,
  { name, expiresInDays, ...signed }: Confirmation & { name: string; expiresInDays: number },
): Promise<MadeAccessKey> {
  await confirmIdentity(ctx, signed);
  const key = ACCESS_KEY_PREFIX + randomBytes(32).toString("base64url");
  const createdAt = ctx.now();
  const expiresAt = new Date(createdAt.getTime() + expiresInDays * DAY_MS);
  const row = { id: ctx.newId(), name, prefix: key.slice(0, SHOWN), createdAt, expiresAt };
  await ctx.db.transaction().execute(async (trx) => {
    await lockPerson(trx, ctx.actor.id);
    if ((await query.countWorkingAccessKeys(trx, ctx.actor.id, createdAt)) >= KEYS_MAX) {
      throw new AppError("key.too_many", {
        max: KEYS_MAX,
        message: `At most ${KEYS_MAX} keys work at once; revoke one first.`,
      });
    }
    await query.insertAccessKey(trx, { ...row, personId: ctx.actor.id, keyHash: keyHashOf(key) });
    const data = { key: row.id, prefix: row.prefix, expiresAt: expiresAt.toISOString() };
    await appendEvent(ctx, trx, { action: "access-key.made", subject: ctx.actor.id, data, texts: { name } });
  });
  return { ...viewOf({ ...row, lastUsedAt: null, revokedAt: null }), key };
}

/** Revokes one of one's own keys at once. @throws AppError `key.not_found` */
export async function revokeKey(ctx: PersonCtx, id: string): Promise<void> {
  await ctx.db.transaction().execute(async (trx) => {
    const revoked = await query.revokeAccessKey(trx, { id, personId: ctx.actor.id, revokedAt: ctx.now() });
    if (revoked === undefined)
      throw new AppError("key.not_found", { key: id, message: "You have no such key, or it was revoked before." });
    await appendEvent(ctx, trx, { action: "access-key.revoked", subject: ctx.actor.id, data: { key: id } });
  });
}
