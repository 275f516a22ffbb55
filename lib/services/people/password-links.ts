import { createHash, randomBytes } from "node:crypto";
import type { Trx } from "@/db/executor";
import { insertLink, type LinkPurpose, spendLinks } from "@/db/queries/password-links";
import type { Ctx } from "@/lib/services/context";

const HOUR_MS = 60 * 60 * 1000;
/** How long a link works: a week for somebody new, an hour for somebody who just asked for it. */
const LASTS_MS: Record<LinkPurpose, number> = { invite: 7 * 24 * HOUR_MS, reset: HOUR_MS };

export interface MadeLink {
  token: string;
  expiresAt: Date;
}

/** What is stored of a link's token. Tokens are 256 random bits, so a plain hash can't be guessed back. */
export function tokenHashOf(token: string): Buffer {
  return createHash("sha256").update(token).digest();
}

/** Makes a link for a person and makes their earlier ones useless. Needs the person's lock. */
export async function makeLink(ctx: Ctx, trx: Trx, personId: string, purpose: LinkPurpose): Promise<MadeLink> {
  await spendLinks(trx, personId, ctx.now());
  return addLink(ctx, trx, { personId, purpose, lastsMs: LASTS_MS[purpose] });
}

/** Makes a link beside those that the person has. */
export async function addLink(
  ctx: Ctx,
  trx: Trx,
  { personId, purpose, lastsMs }: { personId: string; purpose: LinkPurpose; lastsMs: number },
): Promise<MadeLink> {
  const token = randomBytes(32).toString("base64url");
  const createdAt = ctx.now();
  const expiresAt = new Date(createdAt.getTime() + lastsMs);
  await insertLink(trx, { tokenHash: tokenHashOf(token), personId, purpose, createdAt, expiresAt });
  return { token, expiresAt };
}
