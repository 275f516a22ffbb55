import { sha256InSteps } from "@/builders/bundle/sha256";
import { deleteIdempotentReply, insertIdempotentReply, storeIdempotentReply } from "@/db/queries/idempotency";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { inSlices } from "@/lib/services/in-slices";

export interface StoredReply {
  status: number;
  body: unknown;
  /** True where an earlier call's reply is given again. */
  replayed: boolean;
}

/**
 * Runs a creating call once per actor, route and key; a repetition within 24 h gets the first reply.
 * Only successes are kept, so that a refused call may be mended and sent again under the same key.
 * @throws AppError `idempotency.key_reused` (same key, other body), `idempotency.in_progress`
 */
export async function replyOnce(
  ctx: Ctx,
  call: { actorId: string; route: string; key: string; body: Buffer },
  run: () => Promise<{ status: number; body: unknown }>,
): Promise<StoredReply> {
  const { actorId, route, key } = call;
  const claim = {
    actorId,
    route,
    key,
    bodySha256: await inSlices(sha256InSteps(call.body)),
    createdAt: ctx.now(),
  };
  const earlier = await insertIdempotentReply(ctx.db, claim);
  if (earlier && !earlier.bodySha256.equals(claim.bodySha256)) {
    throw new AppError("idempotency.key_reused", {
      message: "This Idempotency-Key was used with another body; take a new key.",
    });
  }
  if (earlier?.status === null) {
    throw new AppError("idempotency.in_progress", {
      message: "The first call with this key is still running; ask again shortly.",
    });
  }
  if (earlier) return { status: earlier.status as number, body: earlier.body, replayed: true };
  try {
    const reply = await run();
    await storeIdempotentReply(ctx.db, claim, reply.status, reply.body);
    return { ...reply, replayed: false };
  } catch (error) {
    await deleteIdempotentReply(ctx.db, claim);
    throw error;
  }
}
