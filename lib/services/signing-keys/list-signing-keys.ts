import * as query from "@/db/queries/signing-keys";
import type { Ctx } from "@/lib/services/context";
import { ensureSigningKey } from "./current-signing-key";

/** Every key that releases of this installation were or are signed with, oldest first; `until` is null for the one in use. */
export async function listSigningKeys(ctx: Ctx) {
  await ensureSigningKey(ctx.db, ctx.now());
  const rows = await query.listSigningKeys(ctx.db);
  return {
    items: rows.map((row) => ({
      keyId: row.id,
      algorithm: "Ed25519" as const,
      pem: row.publicPem,
      from: row.fromAt.toISOString(),
      until: row.untilAt?.toISOString() ?? null,
    })),
    next: null,
  };
}
